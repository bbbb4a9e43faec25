using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>In which other units a reading is commonly written down.</summary>
internal static class EntryUnits
{
    // mechanical horsepower: 550 foot-pounds a second; metric: 75 kilogram-metres a second
    private const double Horsepower = 0.745699871582270, MetricHorsepower = 0.73549875;

    public static IReadOnlyList<UnitReading> Of(string? code)
    {
        if (Unit.Find(code) is not { } own)
            return [];
        if (own.Code == "°C")
            return [new("°F", v => (v - 32) / 1.8)];
        if (own.Code == "°F")
            return [new("°C", v => v * 1.8 + 32)];
        var others = Unit.Known
            .Where(u => u.Code != own.Code && u.BaseCode is not null && u.BaseCode == own.BaseCode)
            .Select(u => new UnitReading(u.Label, v => own.FromBaseValue(u.ToBaseValue(v))))
            .ToList();
        if (own.Code == "kW")
            others.AddRange([new("hp", v => v * Horsepower), new("metric hp", v => v * MetricHorsepower)]);
        if (own.Code == "L")
            others.Add(new("US gallons", v => v * 3.785411784));
        return others;
    }
}
