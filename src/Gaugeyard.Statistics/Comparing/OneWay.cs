using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Comparing;

/// <summary>Result of one test; every figure is NaN and the reason says why where it cannot be computed.</summary>
public sealed record TestResult(double Statistic, double Df1, double Df2, double P, string? Reason = null)
{
    internal static TestResult Refused(string reason) => new(double.NaN, double.NaN, double.NaN, double.NaN, reason);
}

/// <summary>Tests of whether independent groups differ. Groups need at least two values each where variances are estimated per group.</summary>
public static class OneWay
{
    /// <summary>Classical analysis of variance: equal variances assumed (Fisher 1925).</summary>
    public static TestResult Classical(IReadOnlyList<double[]> groups)
    {
        int k = groups.Count, n = groups.Sum(g => g.Length);
        if (k < 2 || n <= k)
            return TestResult.Refused("needs two groups and more values than groups");
        var (between, within) = Squares(groups);
        if (within == 0)
            return TestResult.Refused("the values do not vary within the groups");
        double f = between / (k - 1) / (within / (n - k));
        return new TestResult(f, k - 1, n - k, Probability.FisherUpper(f, k - 1, n - k));
    }

    /// <summary>Sums of squares between and within groups.</summary>
    public static (double Between, double Within) Squares(IReadOnlyList<double[]> groups)
    {
        var moments = groups.Select(g => Moments.Of(g)).ToArray();
        // the grand mean as deviation from the first group's keeps digits when means are large and close
        double origin = moments[0].Mean, n = moments.Sum(m => m.Count), shift = moments.Sum(m => m.Count * (m.Mean - origin)) / n;
        return (moments.Sum(m => m.Count * (m.Mean - origin - shift) * (m.Mean - origin - shift)), moments.Sum(m => m.M2));
    }

    /// <summary>Welch (1951, Biometrika 38:330-336): variances may differ.</summary>
    public static TestResult Welch(IReadOnlyList<double[]> groups)
    {
        if (Small(groups) is { } reason)
            return TestResult.Refused(reason);
        int k = groups.Count;
        var m = groups.Select(g => Moments.Of(g)).ToArray();
        if (m.Any(x => x.Variance == 0))
            return TestResult.Refused("a group has no spread");
        double[] w = [.. m.Select(x => x.Count / x.Variance)];
        double total = w.Sum(), mean = m.Select((x, i) => w[i] * x.Mean).Sum() / total;
        double between = m.Select((x, i) => w[i] * (x.Mean - mean) * (x.Mean - mean)).Sum() / (k - 1);
        double lambda = m.Select((x, i) => (1 - w[i] / total) * (1 - w[i] / total) / (x.Count - 1)).Sum();
        double f = between / (1 + 2.0 * (k - 2) / (k * k - 1.0) * lambda), df2 = (k * k - 1.0) / (3 * lambda);
        return new TestResult(f, k - 1, df2, Probability.FisherUpper(f, k - 1, df2));
    }

    /// <summary>Brown and Forsythe's test of means (1974, Technometrics 16:129-132): variances may differ.</summary>
    public static TestResult BrownForsythe(IReadOnlyList<double[]> groups)
    {
        if (Small(groups) is { } reason)
            return TestResult.Refused(reason);
        var m = groups.Select(g => Moments.Of(g)).ToArray();
        double n = m.Sum(x => x.Count), below = m.Sum(x => (1 - x.Count / n) * x.Variance);
        if (below == 0)
            return TestResult.Refused("the values do not vary within the groups");
        double f = Squares(groups).Between / below;
        double df2 = 1 / m.Sum(x => Math.Pow((1 - x.Count / n) * x.Variance / below, 2) / (x.Count - 1));
        return new TestResult(f, groups.Count - 1, df2, Probability.FisherUpper(f, groups.Count - 1, df2));
    }

    /// <summary>Kruskal and Wallis (1952, JASA 47:583-621), corrected for ties; chi-square approximation.</summary>
    public static TestResult KruskalWallis(IReadOnlyList<double[]> groups)
    {
        int k = groups.Count, n = groups.Sum(g => g.Length);
        if (k < 2 || groups.Any(g => g.Length == 0))
            return TestResult.Refused("needs two groups with values");
        var (ranks, ties) = Ranks.Of([.. groups.SelectMany(g => g)]);
        double h = 0;
        int start = 0;
        foreach (double[] g in groups)
        {
            double sum = Sums.Of(ranks.AsSpan(start, g.Length));
            h += sum * sum / g.Length;
            start += g.Length;
        }
        double correction = 1 - ties / ((double)n * n * n - n);
        if (correction <= 0)
            return TestResult.Refused("all values are equal");
        h = (12.0 / (n * (n + 1.0)) * h - 3 * (n + 1.0)) / correction;
        return new TestResult(h, k - 1, double.NaN, Probability.ChiSquareUpper(h, k - 1));
    }

    /// <summary>Levene's test of spread about the median (Brown and Forsythe 1974, JASA 69:364-367).</summary>
    public static TestResult LeveneMedian(IReadOnlyList<double[]> groups) =>
        Classical([.. groups.Select(g =>
        {
            double median = Quantiles.Median(g);
            return g.Select(v => Math.Abs(v - median)).ToArray();
        })]);

    private static string? Small(IReadOnlyList<double[]> groups) =>
        groups.Count < 2 ? "needs two groups" : groups.Any(g => g.Length < 2) ? "a group has only one value" : null;
}
