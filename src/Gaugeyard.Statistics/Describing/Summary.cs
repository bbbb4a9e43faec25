using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Describing;

/// <summary>An interval with its estimate. Low, High, StandardError and Df are NaN where they are not defined.</summary>
/// <param name="Df">Degrees of freedom of the t quantile.</param>
public readonly record struct MeanInterval(double Mean, double StandardError, double Df, double Low, double High)
{
    /// <summary>mean -/+ t(df) times standard error.</summary>
    public static MeanInterval Of(double mean, double standardError, double df, double confidence)
    {
        if (!(df > 0) || double.IsNaN(standardError))
            return new MeanInterval(mean, double.NaN, double.NaN, double.NaN, double.NaN);
        double half = Probability.StudentQuantile(0.5 + confidence / 2, df) * standardError;
        return new MeanInterval(mean, standardError, df, mean - half, mean + half);
    }
}

/// <summary>Figures that describe one sample. Figures that are not defined for it are NaN.</summary>
public sealed record SampleSummary(
    int Count, MeanInterval Mean, double StandardDeviation, double Median, double LowerQuartile, double UpperQuartile, double Min, double Max,
    double Mad, double TrimmedMean, double Skewness, double ExcessKurtosis, double GeometricMean, double HarmonicMean);

/// <summary>Describes one sample of independent values.</summary>
public static class Summary
{
    /// <summary>All figures at once; O(n log n).</summary>
    /// <param name="values">Finite values in any order; not changed.</param>
    /// <param name="confidence">Of the t interval, in (0, 1).</param>
    /// <param name="type">Definition of the quartiles.</param>
    public static SampleSummary Of(ReadOnlySpan<double> values, double confidence, QuantileType type = QuantileType.Seven)
    {
        double[] sorted = values.ToArray();
        Array.Sort(sorted);
        int n = sorted.Length;
        if (n == 0)
            return new SampleSummary(0, new MeanInterval(double.NaN, double.NaN, double.NaN, double.NaN, double.NaN), double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN, double.NaN);
        // values near the end of the double range are described after scaling by a power of two, which is exact
        double largest = Math.Max(Math.Abs(sorted[0]), Math.Abs(sorted[^1]));
        double scale = largest > 1e70 || (largest < 1e-70 && largest > 0) ? Math.ScaleB(1, Math.ILogB(largest)) : 1;
        double[] scaled = scale == 1 ? sorted : [.. sorted.Select(v => v / scale)];
        var moments = Moments.Of(scaled);
        double sd = moments.StandardDeviation * scale;
        double mean = sorted[0] == sorted[^1] ? sorted[0] : moments.Mean * scale;
        return new SampleSummary(
            n,
            MeanInterval.Of(mean, sd / Math.Sqrt(n), n - 1, confidence),
            sorted[0] == sorted[^1] && n > 1 ? 0 : sd,
            Quantiles.MedianOfSorted(sorted),
            Quantiles.OfSorted(sorted, 0.25, type),
            Quantiles.OfSorted(sorted, 0.75, type),
            sorted[0],
            sorted[^1],
            Quantiles.MadOfSorted(sorted),
            TrimmedMean(sorted),
            moments.Skewness,
            moments.ExcessKurtosis,
            sorted[0] > 0 ? Math.Exp(Sums.Mean([.. sorted.Select(v => Math.Log(v))])) : double.NaN,
            sorted[0] > 0 ? 1 / Sums.Mean([.. sorted.Select(v => 1 / v)]) : double.NaN);
    }

    /// <summary>Mean after the lowest and highest tenth (rounded down) are left out.</summary>
    public static double TrimmedMean(ReadOnlySpan<double> sorted, double share = 0.1)
    {
        int cut = (int)Math.Floor(share * sorted.Length);
        return Sums.Mean(sorted[cut..^cut]);
    }
}
