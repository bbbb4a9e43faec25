using System.Globalization;

namespace Gaugeyard.DemoSeason;

/// <summary>The columns of the files, in order, and what a run has in each.</summary>
/// <param name="Unit">"" for none.</param>
/// <param name="Format">Format of a number, or "" where the cell is text.</param>
internal sealed record Column(string Name, string Unit, string Format, Func<Run, object> Value)
{
    public const string Run = "Run", Start = "Start", Vehicle = "Vehicle", LoadState = "Load state", Mass = "Test mass", Ambient = "Ambient temperature",
        Pressure = "Tyre pressure", Odometer = "Odometer", Fuel = "Fuel used", City = "City consumption", Highway = "Highway consumption", Remarks = "Remarks";

    public static IReadOnlyList<Column> All { get; } =
    [
        new(Run, "", "", r => r.Name),
        new(Start, "", "", r => r.Start),
        new(Vehicle, "", "", r => r.Vehicle.Label),
        new("Class", "", "", r => r.Vehicle.Class.Name),
        new("Powertrain", "", "", r => r.Vehicle.Powertrain),
        new("Transmission", "", "", r => r.Vehicle.Transmission),
        new("Drive", "", "", r => r.Vehicle.Drive),
        new("Tyre type", "", "", r => r.Vehicle.Tyre),
        new(Pressure, "kPa", "0", r => r.Pressure),
        new(LoadState, "", "", r => r.LoadState),
        new("Driver", "", "", r => r.Driver),
        new("Route", "", "", r => r.Route),
        new("Wet", "", "", r => r.Wet ? "yes" : "no"),
        new(Mass, "kg", "0", r => r.Mass),
        new("Displacement", "L", "0.0", r => r.Vehicle.Displacement),
        new("Power", "kW", "0", r => Math.Round(r.Vehicle.Power)),
        new("Frontal area", "m²", "0.00", r => Math.Round(r.Vehicle.Area, 2)),
        new(Ambient, "°C", "0.0", r => r.Ambient),
        new(Odometer, "km", "0", r => (double)r.Odometer),
        new("Distance", "km", "0.0", r => r.Distance),
        new(Fuel, "L", "0.00", r => r.Fuel),
        new(City, "L/100 km", "0.00", r => r.City),
        new(Highway, "L/100 km", "0.00", r => r.Highway),
        new(Remarks, "", "", r => r.Remarks),
    ];

    public bool IsNumber => Format.Length > 0;

    /// <summary>What somebody wrote: the value, or the slip that took its place; null where the cell was lost.</summary>
    public object? Written(Run run) => run.Lost.Contains(Name) ? null : run.Miswritten.TryGetValue(Name, out double slip) ? slip : Value(run);

    /// <summary>A number as text with a decimal point; slips keep all their digits.</summary>
    public string NumberText(Run run, double number) => number.ToString(run.Miswritten.ContainsKey(Name) ? "0.##" : Format, CultureInfo.InvariantCulture);
}
