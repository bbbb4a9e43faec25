using Gaugeyard.Statistics.Describing;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Describing;

public sealed class VarianceComponentsTests
{
    // own computation: pooled 0.7 / 9 with the vehicles' means taken out, and .6 / 8 where no spread between vehicles shows
    [Fact]
    public void Repeatability_and_the_within_component_are_two_numbers()
    {
        var split = VarianceComponents.Of([7.0, 7.4, 6.9, 7.5, 7.3, 7.1, 7.6, 7.2, 6.8], [0, 0, 0, 0, 1, 1, 1, 2, 2])!;
        Assert.Equal(0, split.Between);
        Assert.Equal(0.075, split.Within, 1e-12);
        Assert.Equal(0.0777778, split.PooledWithin, 1e-7);
    }

    // runs that hardly differ within a vehicle: the between component goes to the variance of the vehicles' means
    [Theory]
    [InlineData(1e-3)]
    [InlineData(1e-5)]
    public void Very_small_spread_within_vehicles_is_found(double noise)
    {
        double[] values = [1 - noise, 1 + noise, 2 - noise, 2, 2 + noise, 4 - noise, 4 + noise, 7 - noise, 7, 7 + noise];
        var split = VarianceComponents.Of(values, [0, 0, 1, 1, 1, 2, 2, 3, 3, 3])!;
        Assert.Equal(7, split.Between, noise);
        Assert.Equal(8 * noise * noise / 6, split.Within, 1e-4 * noise * noise);
    }

    [Fact]
    public void Components_follow_a_change_of_unit()
    {
        double[] values = [7.02, 7.05, 6.98, 7.01, 7.41, 7.38, 7.44, 7.20, 7.24, 7.11];
        int[] vehicles = [0, 0, 0, 0, 1, 1, 1, 2, 2, 3];
        var split = VarianceComponents.Of(values, vehicles)!;
        var scaled = VarianceComponents.Of([.. values.Select(v => 1000 * v)], vehicles)!;
        Assert.Equal(1, scaled.Between / (1e6 * split.Between), 1e-9);
        Assert.Equal(1, scaled.Within / (1e6 * split.Within), 1e-9);
    }
}
