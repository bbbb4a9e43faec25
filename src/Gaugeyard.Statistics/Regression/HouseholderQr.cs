namespace Gaugeyard.Statistics.Regression;

/// <summary>
/// Householder QR of columns taken in order (Golub 1965); a column that is a combination of earlier ones to working accuracy is
/// passed over, so that the first of several aliased columns stays. Column-major, O(n k^2).
/// </summary>
internal sealed class HouseholderQr
{
    private readonly double[][] _vectors;
    private readonly double[] _beta;

    /// <param name="columns">Columns of equal length, each of norm 1 or 0; overwritten.</param>
    /// <param name="tolerance">Rest norm below which a column counts as a combination of the earlier ones.</param>
    public HouseholderQr(double[][] columns, double tolerance, CancellationToken cancel = default)
    {
        int n = columns.Length == 0 ? 0 : columns[0].Length;
        var kept = new List<int>();
        var r = new List<double[]>();
        var vectors = new List<double[]>();
        var betas = new List<double>();
        for (int j = 0; j < columns.Length; j++)
        {
            cancel.ThrowIfCancellationRequested();
            double[] c = columns[j];
            for (int k = 0; k < vectors.Count; k++)
                Reflect(vectors[k], betas[k], k, c);
            int top = vectors.Count;
            double norm = top < n ? Norm(c.AsSpan(top)) : 0;
            if (!(norm > tolerance))
                continue;
            double alpha = c[top] > 0 ? -norm : norm;
            var head = new double[top + 1];
            Array.Copy(c, head, top);
            head[top] = alpha;
            c[top] -= alpha;
            double square = 2 * norm * (norm + Math.Abs(c[top] + alpha));
            r.Add(head);
            kept.Add(j);
            vectors.Add(c);
            betas.Add(2 / square);
        }
        Kept = [.. kept];
        R = [.. r];
        _vectors = [.. vectors];
        _beta = [.. betas];
    }

    /// <summary>Indices of the columns that are not combinations of earlier ones.</summary>
    public int[] Kept { get; }

    /// <summary>Column j of R has j + 1 entries.</summary>
    public double[][] R { get; }

    public int Rank => Kept.Length;

    /// <summary>v becomes Q'v.</summary>
    public void ApplyTransposed(double[] v)
    {
        for (int k = 0; k < _vectors.Length; k++)
            Reflect(_vectors[k], _beta[k], k, v);
    }

    /// <summary>v becomes Qv.</summary>
    public void Apply(double[] v)
    {
        for (int k = _vectors.Length - 1; k >= 0; k--)
            Reflect(_vectors[k], _beta[k], k, v);
    }

    /// <summary>Solves R x = d; d has at least Rank entries.</summary>
    public double[] Solve(ReadOnlySpan<double> d)
    {
        var x = d[..Rank].ToArray();
        for (int j = Rank - 1; j >= 0; j--)
        {
            x[j] /= R[j][j];
            for (int i = 0; i < j; i++)
                x[i] -= R[j][i] * x[j];
        }
        return x;
    }

    /// <summary>Solves R' x = d.</summary>
    public double[] SolveTransposed(ReadOnlySpan<double> d)
    {
        var x = new double[Rank];
        for (int j = 0; j < Rank; j++)
        {
            double sum = d[j];
            for (int i = 0; i < j; i++)
                sum -= R[j][i] * x[i];
            x[j] = sum / R[j][j];
        }
        return x;
    }

    /// <summary>Thin Q as columns.</summary>
    public double[][] ThinQ(int n)
    {
        var q = new double[Rank][];
        Parallel.For(0, Rank, j =>
        {
            q[j] = new double[n];
            q[j][j] = 1;
            Apply(q[j]);
        });
        return q;
    }

    /// <summary>Euclidean norm without overflow for values of ordinary size.</summary>
    internal static double Norm(ReadOnlySpan<double> v)
    {
        double max = 0;
        foreach (double x in v)
            max = Math.Max(max, Math.Abs(x));
        if (max == 0 || !double.IsFinite(max))
            return max;
        double sum = 0;
        foreach (double x in v)
            sum += x / max * (x / max);
        return max * Math.Sqrt(sum);
    }

    private static void Reflect(double[] vector, double beta, int top, double[] target)
    {
        var v = vector.AsSpan(top);
        var t = target.AsSpan(top, v.Length);
        double dot = beta * System.Numerics.Tensors.TensorPrimitives.Dot<double>(v, t);
        if (dot != 0)
            System.Numerics.Tensors.TensorPrimitives.MultiplyAdd<double>(v, -dot, t, t);
    }
}
