using Gaugeyard.Portal.Plots;
using Xunit;

namespace Gaugeyard.Portal.Tests.Plots;

public sealed class AxisTests
{
    [Theory]
    [InlineData(0.0, 10.0)]
    [InlineData(-3.2, 7.9)]
    [InlineData(1e16, 1e16 + 2)]
    [InlineData(2.0240101120000123e16, 2.0240101120000131e16)]
    [InlineData(5.0, 5.0)]
    public void Ticks_come_to_an_end_and_stay_within_the_range(double low, double high)
    {
        var axis = new Axis(low, high, 0, 600);
        var ticks = axis.Ticks.Take(1000).ToList();
        Assert.InRange(ticks.Count, 1, 30);
        Assert.All(ticks, t => Assert.InRange(t, axis.Low - axis.Step * 1e-6, axis.High + axis.Step * 1e-6));
        Assert.Equal(ticks.Distinct().Count(), ticks.Count);
    }

    [Fact]
    public void Ticks_of_a_plain_range_are_round() =>
        Assert.Equal([0.0, 2, 4, 6, 8, 10], new Axis(0, 10, 0, 600, 6).Ticks);
}
