using Gaugeyard.Statistics.Regression;
using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// Value of one weighted local polynomial at its own centre, as a row of weights on the readings. Householder QR where the
/// neighbourhood carries the polynomial, else the minimum-norm solution by singular values.
/// </summary>
internal static class LocalSolve
{
    /// <summary>Singular values (of columns scaled to norm 1) below this share of the largest count as zero.</summary>
    private const double Tolerance = 1e-7;

    /// <summary>Number of coefficients of a polynomial of a degree in a number of predictors.</summary>
    public static int TermCount(int predictors, int degree) => degree switch { 0 => 1, 1 => 1 + predictors, _ => (predictors + 1) * (predictors + 2) / 2 };

    /// <summary>First row of the weighted least-squares operator; null where there is no weight at all.</summary>
    /// <param name="offsets">Per predictor the m distances of the neighbours from the centre.</param>
    /// <param name="weights">m positive weights.</param>
    public static double[]? Row(double[][] offsets, double[] weights, int degree)
    {
        int m = weights.Length, c = TermCount(offsets.Length, degree);
        if (m == 0)
            return null;
        double[] root = [.. weights.Select(Math.Sqrt)];
        var columns = new double[c][];
        columns[0] = (double[])root.Clone();
        for (int j = 0, next = 1 + offsets.Length; j < offsets.Length && degree > 0; j++)
        {
            columns[j + 1] = Times(root, offsets[j]);
            for (int g = 0; g <= j && degree == 2; g++)
                columns[next++] = Times(columns[j + 1], offsets[g]);
        }
        double[] norms = [.. columns.Select(x => HouseholderQr.Norm(x))];
        for (int j = 0; j < c; j++)
            for (int k = 0; k < m && norms[j] > 0; k++)
                columns[j][k] /= norms[j];
        if (m >= c && norms.All(v => v > 0))
        {
            var qr = new HouseholderQr([.. columns.Select(x => (double[])x.Clone())], Tolerance);
            if (qr.Rank == c)
            {
                var unit = new double[c];
                unit[0] = 1 / norms[0];
                var row = new double[m];
                qr.SolveTransposed(unit).CopyTo(row, 0);
                qr.Apply(row);
                return Times(row, root);
            }
        }
        return Smallest(columns, norms[0], root);
    }

    private static double[]? Smallest(double[][] columns, double norm, double[] root)
    {
        var svd = Matrix<double>.Build.DenseOfColumnArrays(columns).Svd();
        double largest = svd.S[0];
        if (!(largest > 0) || !(norm > 0))
            return null;
        var row = new double[root.Length];
        for (int s = 0; s < svd.S.Count; s++)
        {
            if (svd.S[s] <= Tolerance * largest)
                continue;
            double factor = svd.VT[s, 0] / svd.S[s] / norm;
            for (int k = 0; k < row.Length; k++)
                row[k] += factor * svd.U[k, s];
        }
        return Times(row, root);
    }

    private static double[] Times(double[] a, double[] b)
    {
        var product = new double[a.Length];
        for (int k = 0; k < product.Length; k++)
            product[k] = a[k] * b[k];
        return product;
    }
}
