using Gaugeyard.Statistics.Numerics;
using MathNet.Numerics;

namespace Gaugeyard.Statistics.Comparing;

/// <summary>
/// Distribution of the range of k independent normals over an independent estimate of their standard deviation (Student 1927;
/// Tukey 1953). Both integrals by the trapezoid rule, which converges exponentially for these integrands; error below 1e-11
/// for k 2 .. 100 and df from 1 on.
/// </summary>
public static class StudentizedRange
{
    private const double Step = 0.15, Reach = 8.4;
    private static readonly double[] Nodes = [.. Enumerable.Range(-56, 113).Select(i => i * Step)];
    private static readonly double[] Weights = [.. Nodes.Select(z => Step * Probability.NormalDensity(z))];
    private static readonly double[] Lower = [.. Nodes.Select(Probability.NormalCdf)];

    /// <summary>Upper tail: probability of a range of at least q.</summary>
    /// <param name="q">Not negative.</param>
    /// <param name="groups">Number of means, at least 2.</param>
    /// <param name="df">Degrees of freedom of the standard deviation, above 0, may be infinite.</param>
    public static double Upper(double q, int groups, double df)
    {
        Check(groups, df);
        if (double.IsNaN(q))
            return double.NaN;
        if (q <= 0)
            return 1;
        return double.IsPositiveInfinity(df) || df > 1e7 ? Math.Clamp(1 - RangeCdf(q, groups), 0, 1) : Math.Clamp(1 - Cdf(q, groups, df), 0, 1);
    }

    /// <summary>The q whose upper tail is this probability.</summary>
    /// <param name="tail">In (0, 1).</param>
    public static double Quantile(double tail, int groups, double df)
    {
        Check(groups, df);
        if (tail is not (> 0 and < 1))
            throw new ArgumentOutOfRangeException(nameof(tail), $"a tail probability must lie in (0, 1) but is {tail}");
        // one pair, and all pairs by Bonferroni, bracket the answer
        double low = Math.Sqrt(2) * Probability.StudentQuantile(1 - tail / 2, df) * (1 - 1e-9);
        double high = Math.Sqrt(2) * Probability.StudentQuantile(1 - tail / (groups * (groups - 1.0)), df) * (1 + 1e-9);
        if (groups == 2)
            return low / (1 - 1e-9);
        double Gap(double logQ) => Upper(Math.Exp(logQ), groups, df) - tail;
        return Math.Exp(MathNet.Numerics.RootFinding.Brent.FindRoot(Gap, Math.Log(low), Math.Log(high), 1e-14, 200));
    }

    private static void Check(int groups, double df)
    {
        ArgumentOutOfRangeException.ThrowIfLessThan(groups, 2);
        if (!(df > 0))
            throw new ArgumentOutOfRangeException(nameof(df), $"degrees of freedom must be above 0 but are {df}");
    }

    /// <summary>Probability that the range of k standard normals is at most w.</summary>
    internal static double RangeCdf(double w, int groups)
    {
        if (w <= 0)
            return 0;
        if (w > 2 * Reach)
            return 1;
        double sum = 0;
        for (int i = 0; i < Nodes.Length; i++)
        {
            double z = Nodes[i];
            // the difference of two distribution values near 1 is taken on the other tail
            double inside = z > 0 ? Probability.NormalCdf(w - z) - Probability.NormalCdf(-z) : Lower[i] - Probability.NormalCdf(z - w);
            if (inside > 0)
                sum += Weights[i] * Math.Pow(inside, groups - 1);
        }
        return Math.Min(1, groups * sum);
    }

    // integral over u = ln s of the density of the standard deviation times the range distribution at q s
    private static double Cdf(double q, int groups, double df)
    {
        double logConstant = df < 20
            ? Math.Log(2) + df / 2 * Math.Log(df / 2) - SpecialFunctions.GammaLn(df / 2) - df / 2
            : LargeDfConstant(df);
        double h = Math.PI / Math.Sqrt(40 * (df + 6 + groups)), sum = 0;
        foreach (int direction in (ReadOnlySpan<int>)[1, -1])
        {
            for (int i = direction == 1 ? 0 : 1; i < 100_000; i++)
            {
                double u = direction * i * h, g = logConstant - df / 2 * ExpMinusLinear(2 * u), w = q * Math.Exp(u);
                double bound = w < 1 ? (groups - 1) * Math.Log(w / 2.5066) + Math.Log(groups) : 0;
                if (g + bound < -36)
                {
                    if (i > 2)
                        break;
                    continue;
                }
                sum += Math.Exp(g) * RangeCdf(w, groups);
            }
        }
        return h * sum;
    }

    private static double LargeDfConstant(double df)
    {
        double a = df / 2, i = 1 / a, i2 = i * i;
        return 0.5 * Math.Log(df / Math.PI) - i * (1.0 / 12 - i2 * (1.0 / 360 - i2 * (1.0 / 1260 - i2 / 1680)));
    }

    // e^x - 1 - x without cancellation
    private static double ExpMinusLinear(double x)
    {
        if (Math.Abs(x) >= 0.4)
            return Math.Exp(x) - 1 - x;
        double term = x * x / 2, sum = term;
        for (int k = 3; Math.Abs(term) > 1e-18 * Math.Abs(sum) && k < 40; k++)
            sum += term *= x / k;
        return sum;
    }
}
