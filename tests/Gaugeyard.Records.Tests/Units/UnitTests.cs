using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Xunit;

namespace Gaugeyard.Records.Tests.Units;

public sealed class UnitTests
{
    // NIST SP 811 (2008), section B.5: 24 miles per gallon (US) corresponds to 9.8 L/(100 km); factor 235.215 / mpg.
    // The further digits follow from 1 US gal = 3.785411784 L, 1 imperial gal = 4.54609 L, 1 mi = 1.609344 km, all exact.
    [Theory]
    [InlineData("mi/gal-us", 24, "L/100km", 9.800608)]
    [InlineData("mi/gal-us", 15, "L/100km", 15.680972)]
    [InlineData("mi/gal-us", 50, "L/100km", 4.704292)]
    [InlineData("mi/gal-imp", 40, "L/100km", 7.062023)]
    [InlineData("mi/gal-us", 30, "mi/gal-imp", 36.028498)]
    [InlineData("mi/gal-us", 30, "km/L", 12.754311)]
    [InlineData("km/L", 12.754311, "L/100km", 7.840486)]
    [InlineData("kWh/100km", 18, "Wh/mi", 289.68192)]
    public void Converts_as_the_definitions_say(string from, double value, string to, double expected)
    {
        double got = ColumnChanges.Conversion(from, to)!(value);
        Assert.Equal(expected, got, 5e-6);
        Assert.Equal(value, ColumnChanges.Conversion(to, from)!(got), 1e-9);
    }

    [Fact]
    public void Gallons_must_be_chosen_and_families_do_not_mix()
    {
        Assert.Null(Unit.Find("mpg"));
        Assert.Equal("mi/gal-us", Unit.Find("MPG (US)")!.Code);
        Assert.Equal("L/100km", Unit.Find("l/100 km")!.Code);
        Assert.True(Unit.IsEconomy("km/L"));
        Assert.False(Unit.IsEconomy("L/100km"));
        Assert.Null(ColumnChanges.Conversion("mi/gal-us", "kWh/100km"));
        Assert.Null(ColumnChanges.Conversion("kPa", "kg"));
    }
}
