namespace Gaugeyard.DemoSeason;

/// <summary>What vehicles of a class have in common; kilograms, litres, square metres.</summary>
/// <param name="Count">Vehicles in the fleet.</param>
/// <param name="Mass">Kerb mass, middle and spread.</param>
/// <param name="Displacement">Lowest and highest displacement.</param>
/// <param name="PowerPerTonne">Rated power in kW per tonne of kerb mass.</param>
/// <param name="Area">Frontal area, middle.</param>
/// <param name="Drag">Drag coefficient, middle.</param>
/// <param name="Payload">Payload at full load.</param>
/// <param name="Powertrains">Weights of petrol, diesel, hybrid, battery.</param>
/// <param name="Drives">Weights of front, rear, all.</param>
internal sealed record VehicleClass(
    string Name,
    int Count,
    (double Middle, double Spread) Mass,
    (double Low, double High) Displacement,
    double PowerPerTonne,
    double Area,
    double Drag,
    double Payload,
    double Placard,
    double[] Powertrains,
    double[] Drives,
    string[] Models)
{
    /// <summary>The class in which the fuel meter's plug sits in the spray, so that it drops out more often.</summary>
    public const string DropoutClass = "Compact SUV";

    public static IReadOnlyList<VehicleClass> All { get; } =
    [
        new("Small car", 26, (1060, 70), (0.9, 1.5), 62, 2.08, 0.31, 320, 230, [0.70, 0.05, 0.15, 0.10], [1, 0, 0], ["Wrenling", "Minnow", "Pippin"]),
        new("Mid car", 36, (1380, 90), (1.2, 2.2), 72, 2.22, 0.28, 380, 240, [0.42, 0.22, 0.22, 0.14], [0.86, 0.06, 0.08], ["Plover", "Larkspur", "Tarn", "Sorrel"]),
        new("Large car", 18, (1740, 110), (2.0, 3.4), 88, 2.36, 0.27, 420, 250, [0.45, 0.22, 0.15, 0.18], [0.2, 0.5, 0.3], ["Heronmere", "Marquetry"]),
        new("Compact SUV", 32, (1590, 100), (1.4, 2.3), 70, 2.58, 0.33, 420, 240, [0.44, 0.24, 0.18, 0.14], [0.6, 0, 0.4], ["Fellwalker", "Bracken", "Sedge"]),
        new("Large SUV", 16, (2120, 120), (2.2, 3.8), 78, 2.86, 0.35, 520, 260, [0.45, 0.35, 0.12, 0.08], [0, 0.2, 0.8], ["Greatmoor", "Highcairn"]),
        new("Van", 16, (2080, 150), (2.0, 2.8), 52, 3.55, 0.36, 900, 330, [0.25, 0.65, 0, 0.10], [0.55, 0.4, 0.05], ["Packhorse", "Tinker"]),
        new("Pickup", 16, (2190, 150), (2.2, 3.6), 66, 3.25, 0.41, 820, 310, [0.45, 0.55, 0, 0], [0, 0.35, 0.65], ["Drover", "Furrow"]),
    ];
}

/// <summary>The kinds of powertrain, spelled as the files spell them.</summary>
internal static class Powertrain
{
    public const string Petrol = "Petrol", Diesel = "Diesel", Hybrid = "Hybrid", Battery = "Battery";

    public static readonly string[] All = [Petrol, Diesel, Hybrid, Battery];
}
