using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class EntrySuspectsTests
{
    private static readonly UnitReading[] Pounds = [new("lb", v => v * 0.45359237)];

    [Fact]
    public void A_shifted_decimal_is_named()
    {
        var s = EntrySuspects.Find(58.1, 6.0, 0.8)!;
        Assert.Equal(EntrySlip.ShiftedDecimal, s.Slip);
        Assert.Equal(5.81, s.WouldBe);
        Assert.Equal(EntrySlip.ShiftedDecimal, EntrySuspects.Find(0.0712, 7.0, 0.5)!.Slip);
    }

    [Fact]
    public void Another_unit_is_named()
    {
        var s = EntrySuspects.Find(3410, 1540, 90, Pounds)!;
        Assert.Equal(EntrySlip.OtherUnit, s.Slip);
        Assert.Equal("lb", s.Unit);
        Near(1546.7499817, s.WouldBe, 1e-9, "in kg");
    }

    [Fact]
    public void A_unit_that_differs_by_a_power_of_ten_is_named_rather_than_the_decimal()
    {
        UnitReading[] bar = [new("bar", v => v * 100), new("psi", v => v * 6.894757293168361)];
        Assert.Equal((EntrySlip.OtherUnit, "bar"), (EntrySuspects.Find(2.49, 245, 15, bar)!.Slip, EntrySuspects.Find(2.49, 245, 15, bar)!.Unit));
        Assert.Equal("psi", EntrySuspects.Find(35.5, 245, 15, bar)!.Unit);
    }

    [Fact]
    public void Digits_that_changed_places_are_named_only_when_they_fit_well()
    {
        var s = EntrySuspects.Find(9120, 1935, 60)!;
        Assert.Equal((EntrySlip.TransposedDigits, 1920.0), (s.Slip, s.WouldBe));
        Assert.Null(EntrySuspects.Find(9120, 2020, 60));
    }

    [Fact]
    public void An_ordinary_or_inexplicable_value_is_left_alone()
    {
        Assert.Null(EntrySuspects.Find(6.5, 6, 0.8));
        Assert.Null(EntrySuspects.Find(17, 6, 0.8));
        Assert.Null(EntrySuspects.Find(0, 6, 0.8));
        Assert.Throws<ArgumentOutOfRangeException>(() => EntrySuspects.Find(1, 2, 0));
    }

    [Fact]
    public void A_missing_sign_is_named() => Assert.Equal((EntrySlip.Sign, -11.0), (EntrySuspects.Find(11, -10, 1)!.Slip, EntrySuspects.Find(11, -10, 1)!.WouldBe));
}
