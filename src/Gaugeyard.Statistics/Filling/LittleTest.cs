using Gaugeyard.Statistics.Numerics;
using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Filling;

/// <summary>Result of Little's test.</summary>
public sealed record LittleResult(double Statistic, double Df, double P);

/// <summary>
/// Little's (1988, JASA 83:1198-1202) test of whether values are missing completely at random, with mean and covariance by
/// maximum likelihood (EM; Dempster, Laird and Rubin 1977).
/// </summary>
public static class LittleTest
{
    /// <summary>Tests columns of numbers with NaN where missing; null when there is only one pattern or too little data.</summary>
    public static LittleResult? Of(IReadOnlyList<double[]> columns, CancellationToken cancel = default)
    {
        int p = columns.Count, n = p == 0 ? 0 : columns[0].Length;
        double[] centre = [.. columns.Select(c => c.Where(double.IsFinite).DefaultIfEmpty(0).Average())];
        double[] scale = [.. columns.Select((c, j) => Math.Sqrt(c.Where(double.IsFinite).Select(v => (v - centre[j]) * (v - centre[j])).DefaultIfEmpty(0).Average()))];
        if (scale.Any(s => !(s > 0)))
            return null;
        var patterns = Enumerable.Range(0, n).GroupBy(i => string.Concat(columns.Select(c => double.IsNaN(c[i]) ? '0' : '1'))).Where(g => g.Key.Contains('1')).ToArray();
        if (patterns.Length < 2)
            return null;
        var data = patterns.Select(g => (Known: Enumerable.Range(0, p).Where(j => g.Key[j] == '1').ToArray(), Rows: g.ToArray())).ToArray();
        double total = data.Sum(d => d.Rows.Length);
        var mean = Vector<double>.Build.Dense(p);
        var cov = Matrix<double>.Build.DenseIdentity(p);
        double Z(int j, int i) => (columns[j][i] - centre[j]) / scale[j];
        for (int round = 0; round < 5000; round++)
        {
            cancel.ThrowIfCancellationRequested();
            var sum = Vector<double>.Build.Dense(p);
            var products = Matrix<double>.Build.Dense(p, p);
            foreach (var (known, rows) in data)
            {
                int[] gone = [.. Enumerable.Range(0, p).Except(known)];
                Matrix<double>? b = null, rest = null;
                if (gone.Length > 0)
                {
                    var kk = Sub(cov, known, known);
                    b = kk.Cholesky().Solve(Sub(cov, known, gone)).Transpose();
                    rest = Sub(cov, gone, gone) - b * Sub(cov, known, gone);
                }
                foreach (int i in rows)
                {
                    var z = Vector<double>.Build.Dense(p);
                    foreach (int j in known)
                        z[j] = Z(j, i);
                    if (gone.Length > 0)
                    {
                        var d = Vector<double>.Build.Dense(known.Length, a => z[known[a]] - mean[known[a]]);
                        var fill = b! * d;
                        for (int a = 0; a < gone.Length; a++)
                            z[gone[a]] = mean[gone[a]] + fill[a];
                    }
                    sum += z;
                    products += z.OuterProduct(z);
                }
                for (int a = 0; a < gone.Length; a++)
                    for (int c = 0; c < gone.Length; c++)
                        products[gone[a], gone[c]] += rows.Length * rest![a, c];
            }
            var nextMean = sum / total;
            var nextCov = products / total - nextMean.OuterProduct(nextMean);
            double change = Math.Max((nextMean - mean).AbsoluteMaximum(), (nextCov - cov).Enumerate().Max(Math.Abs));
            (mean, cov) = (nextMean, nextCov);
            if (change < 1e-12)
                break;
        }
        double statistic = 0, df = -p;
        foreach (var (known, rows) in data)
        {
            var d = Vector<double>.Build.Dense(known.Length, a => rows.Average(i => Z(known[a], i)) - mean[known[a]]);
            var kk = Sub(cov, known, known);
            if (kk.Determinant() < 1e-14)
                return null;
            statistic += rows.Length * (d * kk.Cholesky().Solve(d));
            df += known.Length;
        }
        return df <= 0 ? null : new LittleResult(statistic, df, Probability.ChiSquareUpper(statistic, df));
    }

    private static Matrix<double> Sub(Matrix<double> m, int[] rows, int[] columns) => Matrix<double>.Build.Dense(rows.Length, columns.Length, (a, b) => m[rows[a], columns[b]]);
}
