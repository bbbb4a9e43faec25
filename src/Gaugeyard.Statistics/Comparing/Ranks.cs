namespace Gaugeyard.Statistics.Comparing;

/// <summary>Ranks with ties shared.</summary>
public static class Ranks
{
    /// <summary>Mid-ranks from 1, and the sum over ties of t^3 - t. O(n log n).</summary>
    public static (double[] Ranks, double Ties) Of(ReadOnlySpan<double> values)
    {
        double[] sorted = values.ToArray();
        int[] order = [.. Enumerable.Range(0, sorted.Length)];
        Array.Sort(sorted, order);
        var ranks = new double[sorted.Length];
        double ties = 0;
        for (int i = 0, j; i < sorted.Length; i = j)
        {
            for (j = i + 1; j < sorted.Length && sorted[j] == sorted[i]; j++) { }
            double t = j - i;
            ties += t * t * t - t;
            for (int k = i; k < j; k++)
                ranks[order[k]] = (i + j + 1) / 2.0;
        }
        return (ranks, ties);
    }
}
