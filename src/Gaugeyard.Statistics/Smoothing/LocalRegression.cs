using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;
using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>Settings of a local regression.</summary>
public sealed record LocalRegressionOptions
{
    /// <summary>Degree of the local polynomial: 0, 1 or 2.</summary>
    public int Degree { get; init; } = 2;

    /// <summary>Share of the records in each neighbourhood, above 0; above 1 stretches the bandwidth by span^(1/p).</summary>
    public double Span { get; init; } = 0.75;

    /// <summary>Whether records far off are weighed down: one fit and three re-weighted ones with bisquare weights at 6 times the median absolute residual.</summary>
    public bool Robust { get; init; }
}

/// <summary>
/// Local regression, fitted directly at every point (Cleveland 1979, JASA 74:829-836; Cleveland and Devlin 1988, JASA 83:596-610):
/// tricube weights over the q = floor(n span + 1e-5) nearest records. With two or more predictors each is divided by its 10 %
/// trimmed standard deviation. Immutable after construction; safe to evaluate from any thread.
/// </summary>
public sealed class LocalRegression
{
    private readonly double[][] _x;
    private readonly double[] _y;
    private readonly double[]? _prior;
    private readonly double[] _scales;
    private readonly int[]? _order;
    private double[]? _robust;

    private LocalRegression(double[][] predictors, double[] y, double[]? weights, LocalRegressionOptions options)
    {
        (_y, _prior, Options) = (y, weights, options);
        _scales = [.. predictors.Select(p => predictors.Length == 1 ? 1 : TrimmedScale(p))];
        _x = [.. predictors.Select((p, j) => p.Select(v => v / _scales[j]).ToArray())];
        Neighbours = Math.Min(Count, (int)Math.Floor(Count * options.Span + 1e-5));
        if (predictors.Length == 1)
        {
            _order = [.. Enumerable.Range(0, Count)];
            double[] keys = (double[])_x[0].Clone();
            Array.Sort(keys, _order);
            Sorted = keys;
        }
    }

    private double[] Sorted { get; } = [];

    public LocalRegressionOptions Options { get; }

    public int Count => _y.Length;

    /// <summary>Records in each neighbourhood.</summary>
    public int Neighbours { get; }

    /// <summary>Coefficients of the local polynomial.</summary>
    public int Terms => TermCount(_x.Length, Options.Degree);

    /// <summary>Number of coefficients of a polynomial.</summary>
    public static int TermCount(int predictors, int degree) => degree switch { 0 => 1, 1 => 1 + predictors, _ => (predictors + 1) * (predictors + 2) / 2 };

    /// <summary>Weight of each record after the robust passes; null without them.</summary>
    public IReadOnlyList<double>? RobustWeights => _robust;

    /// <summary>Sets up a fit.</summary>
    /// <param name="predictors">1 to 4 columns of n finite values.</param>
    /// <param name="y">n finite values.</param>
    /// <param name="weights">n positive weights, or null.</param>
    /// <returns>The fit, or the reason why the data cannot carry it.</returns>
    public static (LocalRegression? Fit, string? Reason) Of(double[][] predictors, double[] y, LocalRegressionOptions options, double[]? weights = null, CancellationToken cancel = default)
    {
        if (predictors.Length is < 1 or > 4)
            throw new ArgumentException($"local regression takes 1 to 4 predictors but got {predictors.Length}", nameof(predictors));
        if (options.Degree is < 0 or > 2 || !(options.Span > 0))
            throw new ArgumentException($"degree must be 0, 1 or 2 and span above 0 but are {options.Degree} and {options.Span}", nameof(options));
        foreach (double[] p in predictors)
            if (p.Length != y.Length)
                throw new ArgumentException($"predictors must have length {y.Length} but one has {p.Length}", nameof(predictors));
        if (weights is not null && weights.Length != y.Length)
            throw new ArgumentException($"weights must have length {y.Length} but has {weights.Length}", nameof(weights));
        if (y.Length == 0)
            return (null, "there are no records");
        foreach (double[] p in predictors)
            if (p.All(v => v == p[0]))
                return (null, "a predictor has the same value in every record");
        var fit = new LocalRegression(predictors, y, weights, options);
        if (fit._scales.Any(s => !(s > 0)))
            return (null, "a predictor has the same value in nearly every record");
        if (fit.Neighbours < fit.Terms)
            return (null, $"a span of {options.Span:0.###} takes {fit.Neighbours} of {y.Length} records into each neighbourhood, too few for a local polynomial of degree {options.Degree} with {fit.Terms} coefficients");
        if (options.Robust)
            fit.Reweigh(cancel);
        return (fit, null);
    }

    private void Reweigh(CancellationToken cancel)
    {
        for (int pass = 0; pass < 3; pass++)
        {
            double[] fitted = FittedValues(cancel);
            double[] size = [.. fitted.Select((f, i) => Math.Abs(_y[i] - f) * Math.Sqrt(_prior?[i] ?? 1))];
            double cut = 6 * Quantiles.Median(size);
            if (!(cut > 1e-300))
                return;
            _robust = [.. size.Select(r => r <= 0.001 * cut ? 1 : r > 0.999 * cut ? 0 : Math.Pow(1 - r / cut * (r / cut), 2))];
        }
    }

    /// <summary>Fitted value at every record; NaN where its neighbourhood cannot carry the polynomial.</summary>
    public double[] FittedValues(CancellationToken cancel = default)
    {
        var fitted = new double[Count];
        Parallel.For(0, Count, Threads(cancel), i => fitted[i] = Evaluate(At(i)));
        return fitted;
    }

    /// <summary>Value at each record from a fit without that record: the neighbourhood moves, q = floor((n - 1) span + 1e-5).</summary>
    public double[] LeaveOneOut(CancellationToken cancel = default)
    {
        var values = new double[Count];
        if (_x.Length == 1)
            Parallel.For(0, Count, Threads(cancel), i => values[i] = Evaluate(At(i), exclude: i));
        else
            Parallel.For(0, Count, Threads(cancel), i => values[i] = Without(i));
        return values;
    }

    // several predictors are scaled anew without the record, as a refit would
    private double Without(int i)
    {
        int[] rest = [.. Enumerable.Range(0, Count).Where(k => k != i)];
        double[][] raw = [.. _x.Select((c, j) => rest.Select(k => c[k] * _scales[j]).ToArray())];
        var fit = new LocalRegression(raw, [.. rest.Select(k => _y[k])], _prior is null ? null : [.. rest.Select(k => _prior[k])], Options) { _robust = _robust is null ? null : [.. rest.Select(k => _robust[k])] };
        double[] at = [.. _x.Select((c, j) => c[i] * _scales[j])];
        return fit.Neighbours < fit.Terms ? double.NaN : fit.Evaluate((ReadOnlySpan<double>)at);
    }

    /// <summary>Value at a point in the predictors' own units; NaN where the neighbourhood cannot carry the polynomial.</summary>
    public double Evaluate(ReadOnlySpan<double> at)
    {
        Span<double> scaled = stackalloc double[at.Length];
        for (int j = 0; j < at.Length; j++)
            scaled[j] = at[j] / _scales[j];
        return Evaluate(scaled.ToArray());
    }

    /// <summary>Row of the operator: value at the point = row . y. Null where the neighbourhood cannot carry the polynomial.</summary>
    public double[]? OperatorRow(ReadOnlySpan<double> at)
    {
        var scaled = new double[at.Length];
        for (int j = 0; j < at.Length; j++)
            scaled[j] = at[j] / _scales[j];
        return Row(scaled, useRobust: true);
    }

    private double[] At(int i) => [.. _x.Select(c => c[i])];

    private double Evaluate(double[] at, int exclude = -1)
    {
        if (_x.Length == 1)
            return Line(at[0], exclude);
        var (rows, weights) = Neighbourhood(at, exclude, useRobust: true);
        return Solve(at, rows, weights) is { } l ? rows.Select((i, k) => l[k] * _y[i]).Sum() : double.NaN;
    }

    // one predictor: power sums of the scaled distance within the window, then a small symmetric system
    private double Line(double at, int exclude)
    {
        var (first, last, h) = Window(at, exclude);
        if (!(h > 0))
            return double.NaN;
        double s0 = 0, s1 = 0, s2 = 0, s3 = 0, s4 = 0, t0 = 0, t1 = 0, t2 = 0;
        for (int k = first; k <= last; k++)
        {
            int i = _order![k];
            if (i == exclude)
                continue;
            double z = (Sorted[k] - at) / h, d = Math.Abs(z);
            if (d >= 1)
                continue;
            double cube = 1 - d * d * d, w = cube * cube * cube;
            if (_prior is not null)
                w *= _prior[i];
            if (_robust is not null)
                w *= _robust[i];
            double wz = w * z, wz2 = wz * z, y = _y[i];
            s0 += w;
            t0 += w * y;
            if (Options.Degree == 0)
                continue;
            s1 += wz;
            s2 += wz2;
            t1 += wz * y;
            if (Options.Degree == 1)
                continue;
            s3 += wz2 * z;
            s4 += wz2 * z * z;
            t2 += wz2 * y;
        }
        if (!(s0 > 0))
            return double.NaN;
        double ybar = t0 / s0;
        if (Options.Degree == 0)
            return ybar;
        // about the weighted mean of z and y, which keeps the digits at the ends of the range
        double m = s1 / s0, a11 = s2 - s1 * m, b1 = t1 - s1 * ybar;
        if (Options.Degree == 1)
            return a11 > 1e-10 * s2 ? ybar - b1 / a11 * m : Fallback(at, exclude);
        double m2 = s2 / s0, a12 = s3 - s1 * m2, a22 = s4 - s2 * m2, b2 = t2 - s2 * ybar;
        if (!(a11 > 1e-10 * s2))
            return Fallback(at, exclude);
        double rest = a22 - a12 * a12 / a11;
        if (!(rest > 1e-8 * s4))
            return Fallback(at, exclude);
        double c2 = (b2 - a12 / a11 * b1) / rest, c1 = (b1 - a12 * c2) / a11;
        return ybar - c1 * m - c2 * m2;
    }

    private double Fallback(double at, int exclude)
    {
        var (rows, weights) = Neighbourhood([at], exclude, useRobust: true);
        return Solve([at], rows, weights) is { } l ? rows.Select((i, k) => l[k] * _y[i]).Sum() : double.NaN;
    }

    // the sorted positions that hold the q nearest records, and the bandwidth
    private (int First, int Last, double H) Window(double at, int exclude)
    {
        int q = exclude < 0 ? Neighbours : Math.Min(Count - 1, (int)Math.Floor((Count - 1) * Options.Span + 1e-5));
        int right = Array.BinarySearch(Sorted, at);
        if (right < 0)
            right = ~right;
        // first position of equal values
        while (right > 0 && Sorted[right - 1] == at)
            right--;
        int left = right - 1, taken = 0;
        double h = 0;
        while (taken < q)
        {
            bool goRight = left < 0 || (right < Count && Sorted[right] - at <= at - Sorted[left]);
            int k = goRight ? right++ : left--;
            if (k < 0 || k >= Count)
                break;
            if (_order![k] == exclude)
                continue;
            h = Math.Max(h, Math.Abs(Sorted[k] - at));
            taken++;
        }
        return (left + 1, right - 1, Stretch(h));
    }

    private double Stretch(double h) => Options.Span > 1 ? h * Math.Pow(Options.Span, 1.0 / _x.Length) : h;

    private (int[] Rows, double[] Weights) Neighbourhood(double[] at, int exclude, bool useRobust)
    {
        var distance = new double[Count];
        for (int i = 0; i < Count; i++)
        {
            double sum = 0;
            for (int j = 0; j < _x.Length; j++)
                sum += (_x[j][i] - at[j]) * (_x[j][i] - at[j]);
            distance[i] = i == exclude ? double.PositiveInfinity : Math.Sqrt(sum);
        }
        int q = exclude < 0 ? Neighbours : Math.Min(Count - 1, (int)Math.Floor((Count - 1) * Options.Span + 1e-5));
        double[] sorted = (double[])distance.Clone();
        Array.Sort(sorted);
        double h = q > 0 ? Stretch(sorted[q - 1]) : 0;
        if (!(h > 0))
            return ([], []);
        var rows = new List<int>();
        var weights = new List<double>();
        for (int i = 0; i < Count; i++)
        {
            double d = distance[i] / h;
            if (d >= 1)
                continue;
            double cube = 1 - d * d * d, w = cube * cube * cube * (_prior?[i] ?? 1) * (useRobust && _robust is not null ? _robust[i] : 1);
            if (w > 0)
            {
                rows.Add(i);
                weights.Add(w);
            }
        }
        return ([.. rows], [.. weights]);
    }

    private double[]? Row(double[] at, bool useRobust)
    {
        var (rows, weights) = Neighbourhood(at, -1, useRobust);
        if (Solve(at, rows, weights) is not { } l)
            return null;
        var row = new double[Count];
        for (int k = 0; k < rows.Length; k++)
            row[rows[k]] = l[k];
        return row;
    }

    // weights of the y's in the value at the point: first row of the weighted least-squares operator
    private double[]? Solve(double[] at, int[] rows, double[] weights)
    {
        int m = rows.Length, c = Terms;
        if (m == 0)
            return null;
        var columns = new double[c][];
        double[] root = [.. weights.Select(Math.Sqrt)];
        columns[0] = (double[])root.Clone();
        if (Options.Degree > 0)
        {
            int next = 1 + _x.Length;
            for (int j = 0; j < _x.Length; j++)
            {
                columns[j + 1] = [.. rows.Select((i, k) => root[k] * (_x[j][i] - at[j]))];
                for (int g = 0; g <= j && Options.Degree == 2; g++)
                    columns[next++] = [.. rows.Select((i, k) => root[k] * (_x[j][i] - at[j]) * (_x[g][i] - at[g]))];
            }
        }
        double[] norms = [.. columns.Select(x => Regression.HouseholderQr.Norm(x))];
        for (int j = 0; j < c; j++)
            for (int k = 0; k < m && norms[j] > 0; k++)
                columns[j][k] /= norms[j];
        double[] l;
        if (m >= c && norms.All(v => v > 0))
        {
            var qr = new Regression.HouseholderQr([.. columns.Select(x => (double[])x.Clone())], 1e-7);
            if (qr.Rank == c)
            {
                var unit = new double[c];
                unit[0] = 1 / norms[0];
                l = new double[m];
                qr.SolveTransposed(unit).CopyTo(l, 0);
                qr.Apply(l);
                return [.. l.Select((v, k) => v * root[k])];
            }
        }
        // too few distinct points for the polynomial: minimum-norm solution, singular values below 1e-7 of the largest left out
        var svd = Matrix<double>.Build.DenseOfColumnArrays(columns).Svd();
        double largest = svd.S[0];
        if (!(largest > 0))
            return null;
        l = new double[m];
        for (int s = 0; s < svd.S.Count; s++)
        {
            if (svd.S[s] <= 1e-7 * largest)
                continue;
            double factor = svd.VT[s, 0] / svd.S[s];
            for (int k = 0; k < m; k++)
                l[k] += factor * svd.U[k, s];
        }
        return [.. l.Select((v, k) => norms[0] > 0 ? v / norms[0] * root[k] : 0)];
    }

    /// <summary>
    /// Trace of the operator, residual sum of squares, its two moments, residual scale and degrees of freedom. For a robust fit
    /// trace and moments are those of the unweighted fit, and the scale comes from pseudovalues (Cleveland and Grosse 1991).
    /// </summary>
    public LocalStatistics Statistics(bool moments = true, ulong seed = 1, CancellationToken cancel = default)
    {
        var hat = new double[Count];
        var fitted = new double[Count];
        var norms = new double[Count];
        var rows = moments ? new double[Count][] : null;
        Parallel.For(0, Count, Threads(cancel), i =>
        {
            double[]? row = Row(At(i), useRobust: false);
            if (row is null)
            {
                hat[i] = double.NaN;
                fitted[i] = double.NaN;
                return;
            }
            hat[i] = row[i];
            fitted[i] = Dot(row, _y);
            if (!moments)
                return;
            norms[i] = Dot(row, row);
            rows![i] = row;
        });
        double[] robustFit = _robust is null ? fitted : FittedValues(cancel);
        double rss = 0;
        for (int i = 0; i < Count; i++)
            rss += (_prior?[i] ?? 1) * Math.Pow(_y[i] - robustFit[i], 2);
        double trace = Sums.Of(hat);
        if (!moments)
            return new LocalStatistics(robustFit, hat, trace, rss, double.NaN, double.NaN, double.NaN);
        double delta1 = Count - 2 * trace + Sums.Of(norms), delta2 = Delta2(rows!, seed, cancel);
        double scaleSquares = rss;
        if (_robust is not null)
        {
            double[] pseudo = Pseudovalues(robustFit);
            scaleSquares = 0;
            for (int i = 0; i < Count; i++)
                scaleSquares += (_prior?[i] ?? 1) * Math.Pow(pseudo[i] - Dot(rows![i], pseudo), 2);
        }
        return new LocalStatistics(robustFit, hat, trace, rss, delta1, delta2, Math.Sqrt(scaleSquares / delta1));
    }

    private double[] Pseudovalues(double[] fitted)
    {
        double[] size = [.. fitted.Select((f, i) => Math.Abs(_y[i] - f) * Math.Sqrt(_prior?[i] ?? 1))];
        double c = Math.Pow(6 * Quantiles.Median(size), 2) / 5, sum = 0;
        for (int i = 0; i < Count; i++)
            sum += (1 - size[i] * size[i] / c) * Math.Sqrt(_robust![i]);
        double factor = Count / sum;
        return [.. fitted.Select((f, i) => f + factor * _robust![i] * (_y[i] - f))];
    }

    // n - 2 tr A + |A|^2 with A = L + L' - L'L; by random signs where the full product would be too large
    private double Delta2(double[][] rows, ulong seed, CancellationToken cancel)
    {
        if (rows.Any(r => r is null))
            return double.NaN;
        if (Count <= 1000)
        {
            var l = Matrix<double>.Build.DenseOfRowArrays(rows);
            var a = l + l.Transpose() - l.TransposeThisAndMultiply(l);
            return Count - 2 * a.Trace() + a.PointwisePower(2).RowSums().Sum();
        }
        const int Vectors = 20;
        double sum = 0;
        for (int v = 0; v < Vectors; v++)
        {
            cancel.ThrowIfCancellationRequested();
            var random = new RandomStream(seed, 0xD2, (ulong)v);
            var z = new double[Count];
            for (int i = 0; i < Count; i++)
                z[i] = (random.NextWord() & 1) == 0 ? -1 : 1;
            // (I - L)'(I - L) z
            double[] r = Rest(z), back = new double[Count];
            for (int i = 0; i < Count; i++)
            {
                back[i] += r[i];
                double ri = r[i];
                double[] row = rows[i];
                for (int j = 0; j < Count; j++)
                    back[j] -= row[j] * ri;
            }
            sum += Dot(back, back);
        }
        return sum / Vectors;

        double[] Rest(double[] z) => [.. rows.Select((row, i) => z[i] - Dot(row, z))];
    }

    private static double Dot(double[] a, double[] b) => System.Numerics.Tensors.TensorPrimitives.Dot<double>(a, b);

    private static double TrimmedScale(double[] values)
    {
        double[] sorted = [.. values.Order()];
        int cut = (int)Math.Ceiling(0.1 * sorted.Length);
        return sorted.Length - 2 * cut < 2 ? Moments.Of(sorted).StandardDeviation : Moments.Of(sorted.AsSpan(cut, sorted.Length - 2 * cut)).StandardDeviation;
    }

    private static ParallelOptions Threads(CancellationToken cancel) => new() { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount };
}

/// <summary>Figures of a local regression over its own records.</summary>
/// <param name="Hat">Diagonal of the operator.</param>
/// <param name="Delta1">First moment of the residual operator; NaN when not asked for.</param>
/// <param name="Delta2">Second moment.</param>
/// <param name="S">Residual scale.</param>
public sealed record LocalStatistics(double[] Fitted, double[] Hat, double Trace, double Rss, double Delta1, double Delta2, double S)
{
    /// <summary>Degrees of freedom of pointwise t intervals.</summary>
    public double Df => Delta1 * Delta1 / Delta2;

    /// <summary>n RSS / (n - trace)^2 (Craven and Wahba 1979).</summary>
    public double Gcv => Fitted.Length * Rss / Math.Pow(Fitted.Length - Trace, 2);

    /// <summary>ln(RSS / n) + 1 + 2 (trace + 1) / (n - trace - 2) (Hurvich, Simonoff and Tsai 1998, JRSS B 60:271-293).</summary>
    public double Aicc => Fitted.Length - Trace - 2 > 0 ? Math.Log(Rss / Fitted.Length) + 1 + 2 * (Trace + 1) / (Fitted.Length - Trace - 2) : double.NaN;
}
