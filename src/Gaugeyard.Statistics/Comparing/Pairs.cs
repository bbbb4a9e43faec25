using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Comparing;

/// <summary>How pairs of groups are compared.</summary>
public enum PairMethod
{
    /// <summary>Games and Howell (1976): variances may differ; simultaneous.</summary>
    GamesHowell,

    /// <summary>Tukey (1953) and Kramer (1956): one variance for all; simultaneous.</summary>
    TukeyKramer,

    /// <summary>Welch tests adjusted by Holm (1979); the intervals are Bonferroni's, which can disagree with Holm's p.</summary>
    HolmWelch,
}

/// <summary>One pair of groups: difference is b minus a.</summary>
/// <param name="A">Index of the first group.</param>
/// <param name="B">Index of the second group.</param>
/// <param name="P">Adjusted for the whole family.</param>
/// <param name="HedgesG">Standardized difference with the exact small-sample factor (Hedges 1981); NaN without spread.</param>
public sealed record PairResult(int A, int B, double Difference, double StandardError, double Df, double Low, double High, double P, double HedgesG, double GLow, double GHigh);

/// <summary>All pairs of independent groups, with statements that hold together.</summary>
public static class PairComparisons
{
    /// <summary>Compares every pair.</summary>
    /// <param name="groups">At least two groups with at least two values each.</param>
    /// <param name="confidence">Of the family, in (0, 1).</param>
    /// <exception cref="ArgumentException">A group has fewer than two values.</exception>
    public static IReadOnlyList<PairResult> Of(IReadOnlyList<double[]> groups, PairMethod method, double confidence)
    {
        int k = groups.Count;
        var m = groups.Select(g => Moments.Of(g)).ToArray();
        for (int i = 0; i < k; i++)
            if (m[i].Count < 2)
                throw new ArgumentException($"group {i} must have at least 2 values but has {m[i].Count}", nameof(groups));
        double n = m.Sum(x => x.Count), pooled = m.Sum(x => x.M2) / (n - k), alpha = 1 - confidence;
        int family = k * (k - 1) / 2;
        double tukey = method == PairMethod.TukeyKramer ? StudentizedRange.Quantile(alpha, k, n - k) : 0;
        var pairs = new List<PairResult>(family);
        for (int a = 0; a < k; a++)
            for (int b = a + 1; b < k; b++)
            {
                double d = m[b].Mean - m[a].Mean, va = m[a].Variance / m[a].Count, vb = m[b].Variance / m[b].Count, se, df, half, p;
                if (method == PairMethod.TukeyKramer)
                {
                    (se, df) = (Math.Sqrt(pooled / 2 * (1.0 / m[a].Count + 1.0 / m[b].Count)), n - k);
                    half = tukey * se;
                    p = StudentizedRange.Upper(Math.Abs(d) / se, k, df);
                }
                else
                {
                    se = Math.Sqrt(va + vb);
                    df = (va + vb) * (va + vb) / (va * va / (m[a].Count - 1) + vb * vb / (m[b].Count - 1));
                    if (method == PairMethod.GamesHowell)
                    {
                        half = double.IsNaN(df) ? double.NaN : StudentizedRange.Quantile(alpha, k, df) * se / Math.Sqrt(2);
                        p = double.IsNaN(df) ? double.NaN : StudentizedRange.Upper(Math.Abs(d) / se * Math.Sqrt(2), k, df);
                    }
                    else
                    {
                        half = double.IsNaN(df) ? double.NaN : Probability.StudentQuantile(1 - alpha / (2 * family), df) * se;
                        p = double.IsNaN(df) ? double.NaN : Probability.StudentTwoSided(d / se, df);
                    }
                }
                if (se == 0)
                    (half, p) = (0, d == 0 ? 1 : 0);
                var (g, gLow, gHigh) = HedgesG(m[a], m[b], confidence);
                pairs.Add(new PairResult(a, b, d, se, df, d - half, d + half, p, g, gLow, gHigh));
            }
        if (method == PairMethod.HolmWelch)
        {
            double[] adjusted = Holm([.. pairs.Select(p => p.P)]);
            for (int i = 0; i < pairs.Count; i++)
                pairs[i] = pairs[i] with { P = adjusted[i] };
        }
        return pairs;
    }

    /// <summary>Holm's step-down adjustment (1979, Scandinavian J. of Statistics 6:65-70).</summary>
    public static double[] Holm(ReadOnlySpan<double> p)
    {
        double[] sorted = p.ToArray();
        int[] order = [.. Enumerable.Range(0, sorted.Length)];
        Array.Sort(sorted, order);
        var adjusted = new double[sorted.Length];
        double running = 0;
        for (int i = 0; i < sorted.Length; i++)
        {
            running = Math.Max(running, Math.Min(1, (sorted.Length - i) * sorted[i]));
            adjusted[order[i]] = running;
        }
        return adjusted;
    }

    // pooled standard deviation of the two groups; interval by the normal approximation (Hedges and Olkin 1985)
    private static (double G, double Low, double High) HedgesG(Moments a, Moments b, double confidence)
    {
        double df = a.Count + b.Count - 2, sd = Math.Sqrt((a.M2 + b.M2) / df);
        if (!(sd > 0))
            return (double.NaN, double.NaN, double.NaN);
        // Gamma(h) / (sqrt(h) Gamma(h - 1/2)) by the errors of Stirling's formula, which do not cancel for many records
        double h = df / 2;
        double j = Math.Exp(-(h - 1) * IncompleteIntegrals.LogOnePlus(-0.5 / h) - 0.5 + IncompleteIntegrals.StirlingError(h) - IncompleteIntegrals.StirlingError(h - 0.5));
        double g = j * (b.Mean - a.Mean) / sd;
        double se = Math.Sqrt((double)(a.Count + b.Count) / (a.Count * b.Count) + g * g / (2.0 * (a.Count + b.Count)));
        double z = Probability.NormalQuantile(0.5 + confidence / 2);
        return (g, g - z * se, g + z * se);
    }
}
