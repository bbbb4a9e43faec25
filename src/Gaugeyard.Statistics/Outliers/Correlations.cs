using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>Correlations of every pair of readings, each pair from the records that know both.</summary>
/// <param name="R">p x p, symmetric, 1 on the diagonal; NaN where fewer than 3 records know both or one of them is constant there.</param>
/// <param name="N">Records that know both; on the diagonal those that know the reading.</param>
public sealed record CorrelationMatrix(double[,] R, int[,] N);

/// <summary>Linear (Pearson 1896) and rank (Spearman 1904, ties at mid-ranks) correlations, pairwise complete.</summary>
public static class Correlations
{
    /// <summary>Linear correlations; two passes per pair, compensated means. O(n p^2).</summary>
    /// <param name="readings">p arrays of n values; NaN stands for missing.</param>
    /// <exception cref="ArgumentException">Lengths differ.</exception>
    public static CorrelationMatrix Pearson(IReadOnlyList<double[]> readings, CancellationToken cancel = default) =>
        Pairs(readings, (a, b) =>
        {
            var (n, x, y) = Common(readings[a], readings[b]);
            return (Of(x.AsSpan(0, n), y.AsSpan(0, n)), n);
        }, cancel);

    /// <summary>
    /// Rank correlations: ranks are those among the records that know both readings. Each reading is sorted once; a pair then walks
    /// the two orders. O(p n log n + p^2 n).
    /// </summary>
    /// <param name="readings">p arrays of n values; NaN stands for missing.</param>
    /// <exception cref="ArgumentException">Lengths differ.</exception>
    public static CorrelationMatrix Spearman(IReadOnlyList<double[]> readings, CancellationToken cancel = default)
    {
        var orders = new int[readings.Count][];
        Parallel.For(0, readings.Count, new ParallelOptions { CancellationToken = cancel }, j => orders[j] = Order(readings[j]));
        return Pairs(readings, (a, b) =>
        {
            double[] x = Ranks(readings[a], orders[a], readings[b]), y = Ranks(readings[b], orders[b], readings[a]);
            int n = 0;
            for (int i = 0; i < x.Length; i++)
                if (x[i] > 0)
                {
                    x[n] = x[i];
                    y[n++] = y[i];
                }
            return (Of(x.AsSpan(0, n), y.AsSpan(0, n)), n);
        }, cancel);
    }

    /// <summary>Linear correlation of two complete arrays of equal length; NaN below 3 values or when one is constant.</summary>
    public static double Of(ReadOnlySpan<double> x, ReadOnlySpan<double> y)
    {
        if (x.Length != y.Length)
            throw new ArgumentException($"y must have length {x.Length} but has {y.Length}", nameof(y));
        if (x.Length < 3)
            return double.NaN;
        double mx = Sums.Mean(x), my = Sums.Mean(y), sxx = 0, syy = 0, sxy = 0;
        for (int i = 0; i < x.Length; i++)
        {
            double dx = x[i] - mx, dy = y[i] - my;
            sxx += dx * dx;
            syy += dy * dy;
            sxy += dx * dy;
        }
        // a constant reading leaves only rounding
        if (!(sxx > 1e-28 * x.Length * mx * mx) || !(syy > 1e-28 * y.Length * my * my))
            return double.NaN;
        return Math.Clamp(sxy / Math.Sqrt(sxx) / Math.Sqrt(syy), -1, 1);
    }

    private static CorrelationMatrix Pairs(IReadOnlyList<double[]> readings, Func<int, int, (double R, int N)> pair, CancellationToken cancel)
    {
        int p = readings.Count;
        for (int j = 1; j < p; j++)
            if (readings[j].Length != readings[0].Length)
                throw new ArgumentException($"reading {j} must have length {readings[0].Length} but has {readings[j].Length}", nameof(readings));
        var r = new double[p, p];
        var n = new int[p, p];
        for (int j = 0; j < p; j++)
        {
            r[j, j] = 1;
            foreach (double v in readings[j])
                if (!double.IsNaN(v))
                    n[j, j]++;
        }
        Parallel.For(0, p * (p - 1) / 2, new ParallelOptions { CancellationToken = cancel }, k =>
        {
            int a = 1;
            while (k >= a)
                k -= a++;
            (r[a, k], n[a, k]) = pair(a, k);
            (r[k, a], n[k, a]) = (r[a, k], n[a, k]);
        });
        return new CorrelationMatrix(r, n);
    }

    private static (int N, double[] X, double[] Y) Common(double[] x, double[] y)
    {
        double[] a = new double[x.Length], b = new double[x.Length];
        int n = 0;
        for (int i = 0; i < x.Length; i++)
        {
            a[n] = x[i];
            b[n] = y[i];
            if (!double.IsNaN(x[i]) && !double.IsNaN(y[i]))
                n++;
        }
        return (n, a, b);
    }

    private static int[] Order(double[] x)
    {
        var keys = new double[x.Length];
        var order = new int[x.Length];
        int n = 0;
        for (int i = 0; i < x.Length; i++)
            if (!double.IsNaN(x[i]))
            {
                keys[n] = x[i];
                order[n++] = i;
            }
        Array.Sort(keys, order, 0, n);
        return order[..n];
    }

    /// <summary>Mid-ranks from 1 among the records where the other is known too; 0 elsewhere.</summary>
    private static double[] Ranks(double[] x, int[] order, double[] other)
    {
        var ranks = new double[x.Length];
        int rank = 0;
        for (int i = 0; i < order.Length;)
        {
            int first = i, count = 0;
            double v = x[order[i]];
            for (; i < order.Length && x[order[i]] == v; i++)
                if (!double.IsNaN(other[order[i]]))
                    count++;
            double mid = rank + (count + 1) / 2.0;
            for (int k = first; k < i; k++)
                if (!double.IsNaN(other[order[k]]))
                    ranks[order[k]] = mid;
            rank += count;
        }
        return ranks;
    }
}
