namespace Gaugeyard.Statistics.Outliers;

/// <summary>p-values of several tests at once, adjusted so that each may be compared with the level for all.</summary>
public static class AdjustedP
{
    /// <summary>
    /// Holm's step-down adjustment (Holm 1979, Scand. J. Stat. 6:65-70): bounds the chance of any false finding under every
    /// dependence. O(n log n).
    /// </summary>
    /// <param name="p">p-values in [0, 1]; NaN stands for a test that could not be made and stays NaN.</param>
    public static double[] Holm(ReadOnlySpan<double> p)
    {
        int[] order = Ascending(p, out int tests);
        double[] adjusted = NaN(p.Length);
        double largest = 0;
        for (int rank = 0; rank < tests; rank++)
            adjusted[order[rank]] = largest = Math.Max(largest, Math.Min(1, (tests - rank) * p[order[rank]]));
        return adjusted;
    }

    /// <summary>
    /// The smallest false-discovery rate at which each test would be named (Benjamini and Hochberg 1995, J. R. Stat. Soc. B
    /// 57:289-300). O(n log n).
    /// </summary>
    /// <param name="p">p-values in [0, 1]; NaN stands for a test that could not be made and stays NaN.</param>
    public static double[] FalseDiscovery(ReadOnlySpan<double> p)
    {
        int[] order = Ascending(p, out int tests);
        double[] adjusted = NaN(p.Length);
        double smallest = 1;
        for (int rank = tests - 1; rank >= 0; rank--)
            adjusted[order[rank]] = smallest = Math.Min(smallest, p[order[rank]] * tests / (rank + 1));
        return adjusted;
    }

    private static int[] Ascending(ReadOnlySpan<double> p, out int tests)
    {
        var keys = new double[p.Length];
        var order = new int[p.Length];
        tests = 0;
        for (int i = 0; i < p.Length; i++)
        {
            if (p[i] is < 0 or > 1)
                throw new ArgumentException($"p must lie in [0, 1] but p[{i}] is {p[i]}", nameof(p));
            if (double.IsNaN(p[i]))
                continue;
            keys[tests] = p[i];
            order[tests++] = i;
        }
        Array.Sort(keys, order, 0, tests);
        return order;
    }

    private static double[] NaN(int length)
    {
        var values = new double[length];
        Array.Fill(values, double.NaN);
        return values;
    }
}
