using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class FisherExactTests
{
    // The first is the lady tasting tea (Fisher 1935, The Design of Experiments, II): 34/70. The second is Fisher's table of criminal twins (1934), two-sided.
    // All by own computation in exact rational arithmetic (Python fractions over binomial coefficients).
    [Theory]
    [InlineData(3, 1, 1, 3, 0.4857142857142857)]
    [InlineData(10, 2, 3, 15, 0.0005367241191434358)]
    [InlineData(9, 3, 2, 40, 2.007921772270358e-06)]
    [InlineData(0, 5, 5, 0, 0.007936507936507936)]
    [InlineData(120, 880, 60, 940, 3.3639928007092355e-06)]
    [InlineData(40, 10, 2000, 8000, 1.71966081619005e-19)]
    [InlineData(5, 0, 1, 4, 0.047619047619047616)]
    [InlineData(7, 12, 0, 5, 0.272068511198946)]
    public void Two_sided_agrees_with_exact_arithmetic(int a, int b, int c, int d, double p) => Near(p, FisherExact.TwoSided(a, b, c, d), 1e-12, "p");

    [Fact]
    public void Turning_the_table_changes_nothing()
    {
        double p = FisherExact.TwoSided(8, 3, 5, 21);
        Near(p, FisherExact.TwoSided(3, 8, 21, 5), 1e-12, "columns");
        Near(p, FisherExact.TwoSided(5, 21, 8, 3), 1e-12, "rows");
        Near(p, FisherExact.TwoSided(8, 5, 3, 21), 1e-12, "transposed");
    }

    [Fact]
    public void Empty_margins_and_large_tables_are_carried()
    {
        Assert.Equal(1, FisherExact.TwoSided(0, 0, 3, 4));
        Assert.Equal(1, FisherExact.TwoSided(0, 0, 0, 0));
        Assert.InRange(FisherExact.TwoSided(500_000, 500_000, 500_200, 499_800), 0.7, 0.85);
        Assert.InRange(FisherExact.TwoSided(300, 700, 100_000, 900_000), 0, 1e-60);
        Assert.Throws<ArgumentOutOfRangeException>(() => FisherExact.TwoSided(-1, 2, 3, 4));
    }
}
