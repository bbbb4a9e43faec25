using Gaugeyard.Statistics.Comparing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>Whether one sample tends to lie above another.</summary>
public static class RankSum
{
    /// <summary>
    /// Two-sided p-value of the rank-sum test (Wilcoxon 1945; Mann and Whitney 1947) by its normal approximation with ties and continuity corrected.
    /// O(n log n). NaN when a sample is empty; 1 when all values are equal.
    /// </summary>
    public static double TwoSided(ReadOnlySpan<double> a, ReadOnlySpan<double> b)
    {
        if (a.IsEmpty || b.IsEmpty)
            return double.NaN;
        double[] all = [.. a, .. b];
        var (ranks, ties) = Ranks.Of(all);
        double n = all.Length, m = a.Length, sum = 0;
        for (int i = 0; i < a.Length; i++)
            sum += ranks[i];
        double off = Math.Abs(sum - m * (n + 1) / 2), variance = m * (n - m) / 12 * (n + 1 - ties / (n * (n - 1)));
        return variance > 0 ? Math.Min(1, 2 * Probability.NormalUpper(Math.Max(0, off - 0.5) / Math.Sqrt(variance))) : 1;
    }
}
