using Gaugeyard.Statistics.Comparing;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Comparing;

/// <summary>Worked examples of the NIST/SEMATECH e-Handbook of Statistical Methods, sections 7.4.3 and 7.4.7.</summary>
public sealed class HandbookTests
{
    private static readonly double[][] Four =
        [[6.9, 5.4, 5.8, 4.6, 4.0], [8.3, 6.8, 7.8, 9.2, 6.5], [8.0, 10.5, 8.1, 6.9, 9.3], [5.8, 3.8, 6.1, 5.6, 6.2]];

    [Fact]
    public void One_way_analysis_of_variance_7_4_3()
    {
        var test = OneWay.Classical(Four[..3]);
        Assert.Equal(9.59, test.Statistic, 0.005);
        Assert.Equal(0.003248, test.P, 1e-6);
    }

    [Fact]
    public void Tukey_7_4_7()
    {
        Assert.Equal(4.0461, StudentizedRange.Quantile(0.05, 4, 16), 5e-5);
        var pairs = PairComparisons.Of(Four, PairMethod.TukeyKramer, 0.95);
        var p31 = pairs.Single(p => p is { A: 0, B: 2 });
        Assert.Equal((1.1326, 5.3074), (Math.Round(p31.Low, 4), Math.Round(p31.High, 4)));
        var p14 = pairs.Single(p => p is { A: 0, B: 3 });
        Assert.Equal((-1.9274, 2.2474), (Math.Round(p14.Low, 4), Math.Round(p14.High, 4)));
        // groups 3 and 2 stand above groups 4 and 1
        string[] letters = LetterDisplay.Of([5.34, 7.72, 8.56, 5.50], (i, j) => pairs.Single(p => (p.A == i && p.B == j) || (p.A == j && p.B == i)).P < 0.05);
        Assert.Equal(["b", "a", "a", "b"], letters);
    }

    // Same data, own computation with two independent libraries.
    [Fact]
    public void Other_tests_on_the_same_data()
    {
        var welch = OneWay.Welch(Four);
        Assert.Equal((8.07277, 8.83743, 0.006672), (Math.Round(welch.Statistic, 5), Math.Round(welch.Df2, 5), Math.Round(welch.P, 6)));
        Assert.Equal(0.23273, OneWay.LeveneMedian(Four).Statistic, 5e-6);
        Assert.Equal(13.36581, OneWay.KruskalWallis(Four).Statistic, 5e-6);
    }

    // Open plant growth data (Dobson 1983): own computation, NumPy 1.24.
    [Fact]
    public void Brown_and_Forsythe_test_of_means()
    {
        var data = Reference.ReferenceCases.Data("plantgrowth.csv");
        double[][] groups = [.. new[] { "ctrl", "trt1", "trt2" }.Select(l => data["weight"].Where((_, i) => data["group"][i] == l).Select(Reference.ReferenceCases.Number).ToArray())];
        var test = OneWay.BrownForsythe(groups);
        Assert.Equal(4.8460878624, test.Statistic, 5e-10);
        Assert.Equal(22.2083701945, test.Df2, 5e-9);
        Assert.Equal(.0179274253, test.P, 5e-10);
    }

    // Pseudo-replication (Hurlbert 1984): runs counted as vehicles give p = 0.0002, the vehicles themselves p = 0.13. Own data and computation.
    [Fact]
    public void Counting_runs_as_vehicles_invents_a_difference()
    {
        double[][] a = [[7.02, 7.05, 6.98, 7.01], [7.41, 7.38, 7.44, 7.40], [7.20, 7.24, 7.18, 7.22]];
        double[][] b = [[7.52, 7.49, 7.55, 7.50], [7.31, 7.35, 7.28, 7.33], [7.70, 7.66, 7.73, 7.69]];
        var naive = OneWay.Classical([[.. a.SelectMany(x => x)], [.. b.SelectMany(x => x)]]);
        Assert.Equal(4.3995, Math.Sqrt(naive.Statistic), 5e-5);
        Assert.Equal(0.000227, naive.P, 5e-7);
        var honest = OneWay.Classical([[.. a.Select(x => x.Average())], [.. b.Select(x => x.Average())]]);
        Assert.Equal(1.8974, Math.Sqrt(honest.Statistic), 5e-5);
        Assert.Equal(0.1306, honest.P, 5e-5);
    }

    [Fact]
    public void Degenerate_groups_get_a_reason_and_never_a_crash()
    {
        Assert.NotNull(OneWay.Classical([[1, 2, 3]]).Reason);
        Assert.NotNull(OneWay.Classical([[5, 5], [5, 5]]).Reason);
        Assert.NotNull(OneWay.Welch([[1], [1, 2]]).Reason);
        Assert.NotNull(OneWay.KruskalWallis([[1, 1], [1, 1]]).Reason);
        Assert.Throws<ArgumentException>(() => PairComparisons.Of([[1], [1, 2]], PairMethod.GamesHowell, 0.95));
    }
}
