using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Resampling;

/// <summary>Intervals and bands from resampled statistics.</summary>
public static class BootstrapIntervals
{
    /// <summary>
    /// Order statistic at (R + 1) a, between two by interpolation on the normal scale (Davison and Hinkley 1997, equation 5.8).
    /// </summary>
    /// <param name="sorted">Resampled values in rising order.</param>
    public static double Quantile(ReadOnlySpan<double> sorted, double a)
    {
        int r = sorted.Length;
        double rank = (r + 1) * a;
        int k = (int)Math.Floor(rank + 1e-10);
        if (k < 1)
            return sorted[0];
        if (k >= r)
            return sorted[^1];
        if (Math.Abs(rank - k) < 1e-10)
            return sorted[k - 1];
        double z = Probability.NormalQuantile(a), z0 = Probability.NormalQuantile(k / (r + 1.0)), z1 = Probability.NormalQuantile((k + 1) / (r + 1.0));
        return sorted[k - 1] + (z - z0) / (z1 - z0) * (sorted[k] - sorted[k - 1]);
    }

    /// <summary>Percentile interval (Efron 1979).</summary>
    public static (double Low, double High) Percentile(ReadOnlySpan<double> resampled, double confidence)
    {
        double[] sorted = resampled.ToArray();
        Array.Sort(sorted);
        return (Quantile(sorted, (1 - confidence) / 2), Quantile(sorted, (1 + confidence) / 2));
    }

    /// <summary>Bias-corrected and accelerated interval (Efron 1987, JASA 82:171-185).</summary>
    /// <param name="estimate">The statistic on the data.</param>
    /// <param name="jackknife">The statistic with each unit left out, for the acceleration.</param>
    public static (double Low, double High) Bca(ReadOnlySpan<double> resampled, double estimate, ReadOnlySpan<double> jackknife, double confidence)
    {
        double[] sorted = resampled.ToArray();
        Array.Sort(sorted);
        int below = 0;
        foreach (double t in sorted)
            if (t < estimate)
                below++;
        double z0 = Probability.NormalQuantile(Math.Clamp(below / (double)sorted.Length, 0.5 / sorted.Length, 1 - 0.5 / sorted.Length));
        double mean = Sums.Mean(jackknife), square = 0, cube = 0;
        foreach (double j in jackknife)
        {
            square += (mean - j) * (mean - j);
            cube += Math.Pow(mean - j, 3);
        }
        double acceleration = square > 0 ? cube / (6 * Math.Pow(square, 1.5)) : 0;
        double Adjusted(double a)
        {
            double z = z0 + Probability.NormalQuantile(a);
            return Probability.NormalCdf(z0 + z / (1 - acceleration * z));
        }
        return (Quantile(sorted, Adjusted((1 - confidence) / 2)), Quantile(sorted, Adjusted((1 + confidence) / 2)));
    }

    /// <summary>
    /// Pointwise percentile and whole-curve (sup-t; Montiel Olea and Plagborg-Moller 2019, J. Applied Econometrics 34:1-17) bands.
    /// </summary>
    /// <param name="curve">The curve on the data at g points.</param>
    /// <param name="resampled">B curves of g points; ones with a NaN are passed over.</param>
    /// <param name="inflate">Factor on the spread, for few units; 1 for none.</param>
    public static Band Bands(double[] curve, IReadOnlyList<double[]> resampled, double confidence, double inflate = 1)
    {
        var used = resampled.Where(c => c.All(double.IsFinite)).ToList();
        int g = curve.Length, b = used.Count;
        var band = new Band(new double[g], new double[g], new double[g], new double[g], new double[g], b);
        if (b < 20)
        {
            foreach (double[] a in new[] { band.Low, band.High, band.WholeLow, band.WholeHigh, band.StandardError })
                Array.Fill(a, double.NaN);
            return band;
        }
        var largest = new double[b];
        for (int j = 0; j < g; j++)
        {
            double[] at = [.. used.Select(c => c[j])];
            double sd = Describing.Moments.Of(at).StandardDeviation * inflate;
            band.StandardError[j] = sd;
            for (int k = 0; k < b; k++)
                if (sd > 0)
                    largest[k] = Math.Max(largest[k], Math.Abs(at[k] - curve[j]) * inflate / sd);
            (band.Low[j], band.High[j]) = Percentile(at, confidence);
            // spread about the curve itself where few units make resamples too alike
            band.Low[j] = curve[j] + inflate * (band.Low[j] - curve[j]);
            band.High[j] = curve[j] + inflate * (band.High[j] - curve[j]);
        }
        Array.Sort(largest);
        double c = largest[Math.Min(b - 1, (int)Math.Ceiling(confidence * (b + 1)) - 1)];
        for (int j = 0; j < g; j++)
        {
            // the curve itself belongs to its band, and the whole-curve band is never the narrower one
            band.Low[j] = Math.Min(band.Low[j], curve[j]);
            band.High[j] = Math.Max(band.High[j], curve[j]);
            band.WholeLow[j] = Math.Min(curve[j] - c * band.StandardError[j], band.Low[j]);
            band.WholeHigh[j] = Math.Max(curve[j] + c * band.StandardError[j], band.High[j]);
        }
        return band;
    }
}

/// <summary>Bands of a curve; arrays of one value per point.</summary>
/// <param name="Used">Resamples that gave a whole curve.</param>
public sealed record Band(double[] Low, double[] High, double[] WholeLow, double[] WholeHigh, double[] StandardError, int Used);
