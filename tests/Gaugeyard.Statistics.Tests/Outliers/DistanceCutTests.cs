using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class DistanceCutTests
{
    // own computation with NumPy 1.24, SciPy and mpmath 1.2 from the formulas of Croux and Haesbroeck (1999) and Hardin and Rocke (2005)
    [Fact]
    public void Degrees_of_freedom_and_cuts_agree_with_quoted_figures()
    {
        Near(282.873045700194, DistanceCut.AsymptoticDegreesOfFreedom(1000, 20, (1000 + 20 + 1) / 2), 1e-11, "asymptotic");
        Near(298.4472748207, DistanceCut.DegreesOfFreedom(1000, 20), 1e-11, "m");
        Near(34.3523687989, DistanceCut.SquaredDistance(0.05, 20, DistanceCut.DegreesOfFreedom(1000, 20)), 1e-10, "cut");
        Near(12.8958595426, DistanceCut.DegreesOfFreedom(50, 5), 1e-10, "m");
        Near(25.3717578885, DistanceCut.SquaredDistance(0.05, 5, DistanceCut.DegreesOfFreedom(50, 5)), 1e-10, "cut");
    }

    [Fact]
    public void Tail_and_cut_undo_each_other()
    {
        foreach (double tail in new[] { 0.5, 0.05, 1e-4, 1e-12 })
            foreach (var (p, m) in new[] { (1, 9.0), (3, 14.2), (8, 240.0) })
                Near(tail, DistanceCut.UpperTail(DistanceCut.SquaredDistance(tail, p, m), p, m), 1e-11, $"{tail} {p} {m}");
    }

    [Fact]
    public void Too_few_degrees_of_freedom_are_refused() =>
        Assert.Contains("p - 1 = 4 but is 4", Assert.Throws<ArgumentException>(() => DistanceCut.UpperTail(3, 5, 4)).Message, StringComparison.Ordinal);

    [Fact]
    public void Ordinary_records_are_named_about_as_often_as_stated()
    {
        // 60 samples of 200 normal records and 3 readings: 12,000 records at the 2.5 % point
        int beyond = 0;
        double m = DistanceCut.DegreesOfFreedom(200, 3);
        for (ulong k = 0; k < 60; k++)
        {
            var r = MinimumCovarianceDeterminant.Estimate(MinimumCovarianceDeterminantTests.Normal(200, 3, 100 + k), new McdOptions { RandomSubsets = 0 });
            beyond += r.RawDistances.Count(d => DistanceCut.UpperTail(d, 3, m) < 0.025);
        }
        // the approximation is known to name a little too few or too many: 1.5 to 3.5 % is asked
        Assert.InRange(beyond / 12_000.0, 0.015, 0.035);
    }
}
