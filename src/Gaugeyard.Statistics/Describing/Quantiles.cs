namespace Gaugeyard.Statistics.Describing;

/// <summary>Which definition of a sample quantile (Hyndman and Fan 1996, The American Statistician 50:361-365).</summary>
public enum QuantileType
{
    /// <summary>p(k) = k / (n + 1).</summary>
    Six = 6,

    /// <summary>p(k) = (k - 1) / (n - 1); the default.</summary>
    Seven = 7,

    /// <summary>p(k) = (k - 1/3) / (n + 1/3); median-unbiased.</summary>
    Eight = 8,
}

/// <summary>Sample quantiles.</summary>
public static class Quantiles
{
    /// <summary>Quantile of values in rising order; NaN for none.</summary>
    /// <param name="sorted">Finite values in rising order.</param>
    /// <param name="p">Probability in [0, 1].</param>
    /// <param name="type">Definition.</param>
    public static double OfSorted(ReadOnlySpan<double> sorted, double p, QuantileType type = QuantileType.Seven)
    {
        if (p is not (>= 0 and <= 1))
            throw new ArgumentOutOfRangeException(nameof(p), $"a probability must lie in [0, 1] but is {p}");
        int n = sorted.Length;
        if (n == 0)
            return double.NaN;
        double m = type switch
        {
            QuantileType.Six => p,
            QuantileType.Seven => 1 - p,
            _ => (p + 1) / 3,
        };
        // a fuzz of a few units in the last place keeps n p + m from falling below a whole number by rounding
        double position = n * p + m;
        double floor = Math.Floor(position + 4 * 2.220446049250313e-16 * Math.Max(1, position));
        double g = position - floor;
        if (Math.Abs(g) < 4 * 2.220446049250313e-16 * Math.Max(1, position))
            g = 0;
        int j = (int)floor;
        double low = sorted[Math.Clamp(j - 1, 0, n - 1)], high = sorted[Math.Clamp(j, 0, n - 1)];
        return g == 0 ? low : low + g * (high - low);
    }

    /// <summary>Median of values in rising order; NaN for none.</summary>
    public static double MedianOfSorted(ReadOnlySpan<double> sorted)
    {
        int n = sorted.Length;
        if (n == 0)
            return double.NaN;
        return n % 2 == 1 ? sorted[n / 2] : sorted[n / 2 - 1] + (sorted[n / 2] - sorted[n / 2 - 1]) / 2;
    }

    /// <summary>Median of values in any order; the values are not changed.</summary>
    public static double Median(ReadOnlySpan<double> values)
    {
        double[] sorted = values.ToArray();
        Array.Sort(sorted);
        return MedianOfSorted(sorted);
    }

    /// <summary>Median absolute deviation from the median, times 1.4826 so that it estimates a normal standard deviation.</summary>
    public static double MadOfSorted(ReadOnlySpan<double> sorted)
    {
        if (sorted.IsEmpty)
            return double.NaN;
        double median = MedianOfSorted(sorted);
        var deviations = new double[sorted.Length];
        for (int i = 0; i < deviations.Length; i++)
            deviations[i] = Math.Abs(sorted[i] - median);
        Array.Sort(deviations);
        return 1.4826 * MedianOfSorted(deviations);
    }
}
