namespace Gaugeyard.DemoSeason;

/// <summary>What is wrong with a vehicle on all its runs.</summary>
internal enum Fault
{
    None,
    DraggingBrake,
    LowTyrePressure,
    TiredHybridBattery,
}

/// <summary>One vehicle of the fleet.</summary>
/// <param name="CityFactor">Its own multiplier of city consumption against its type; the season's hidden truth.</param>
internal sealed record Vehicle(
    string Label,
    VehicleClass Class,
    string Powertrain,
    string Transmission,
    string Drive,
    string Tyre,
    double KerbMass,
    double Displacement,
    double Power,
    double Area,
    double Drag,
    double Pressure,
    double CityFactor,
    double HighwayFactor,
    int Odometer,
    int Runs)
{
    public Fault Fault { get; init; }

    /// <summary>The city meter never worked on this vehicle.</summary>
    public bool CityNeverMeasured { get; init; }
}

/// <summary>Draws the fleet.</summary>
internal static class Fleet
{
    private static readonly string[] Makes = ["Thistlemark", "Pellworth", "Kestrade", "Dunmarrow", "Sarnfell", "Brindlewick", "Velmora"];
    private static readonly string[] Tyres = ["Summer", "All-season", "Winter", "Low-drag"];

    public static List<Vehicle> Draw(Dice dice)
    {
        var fleet = new List<Vehicle>();
        foreach (var kind in VehicleClass.All)
            for (int i = 0; i < kind.Count; i++)
                fleet.Add(DrawOne(dice, kind, fleet.Count + 1));
        PlantFaults(fleet);
        PlantDeadMeters(fleet);
        return fleet;
    }

    private static Vehicle DrawOne(Dice dice, VehicleClass kind, int number)
    {
        string powertrain = Powertrain.All[dice.Weighted(kind.Powertrains)];
        // heavy batteries and second motors show in the mass
        double extra = powertrain switch { Powertrain.Battery => 0.19, Powertrain.Hybrid => 0.06, Powertrain.Diesel => 0.035, _ => 0 };
        double mass = (kind.Mass.Middle + kind.Mass.Spread * dice.Normal()) * (1 + extra);
        double size = dice.Unit();
        double displacement = powertrain == Powertrain.Battery ? 0 : Math.Round(kind.Displacement.Low + (kind.Displacement.High - kind.Displacement.Low) * size, 1);
        double power = kind.PowerPerTonne * mass / 1000 * (0.8 + 0.4 * size + 0.06 * dice.Normal()) * (powertrain == Powertrain.Battery ? 1.35 : 1);
        string transmission = powertrain switch
        {
            Powertrain.Battery => "Single speed",
            Powertrain.Hybrid => dice.Chance(0.7) ? "Continuously variable" : "Automatic",
            _ => dice.Chance(kind.Name is "Small car" or "Van" ? 0.65 : 0.35) ? "Manual" : dice.Chance(0.15) ? "Continuously variable" : "Automatic",
        };
        string drive = new[] { "Front", "Rear", "All" }[dice.Weighted(kind.Drives)];
        string tyre = Tyres[dice.Weighted([0.36, 0.36, 0.12, powertrain is Powertrain.Battery or Powertrain.Hybrid ? 0.4 : 0.12])];
        double own = 0.022 * dice.Normal();
        return new Vehicle(
            $"{dice.Pick(Makes)} {dice.Pick(kind.Models)} {number:000}",
            kind, powertrain, transmission, drive, tyre,
            mass, displacement, power,
            kind.Area * (1 + 0.025 * dice.Normal()),
            kind.Drag * (1 + 0.03 * dice.Normal()),
            kind.Placard,
            1 + own + 0.010 * dice.Normal(),
            1 + own + 0.010 * dice.Normal(),
            1500 + (int)dice.Between(0, 90000),
            1 + (int)(30 * Math.Pow(dice.Unit(), 1.28)));
    }

    private static void PlantFaults(List<Vehicle> fleet)
    {
        void Plant(Fault fault, Func<Vehicle, bool> where)
        {
            int at = fleet.FindIndex(v => v.Fault == Fault.None && v.Runs is >= 9 and <= 20 && where(v));
            fleet[at] = fleet[at] with { Fault = fault };
        }
        Plant(Fault.DraggingBrake, v => v.Class.Name == "Mid car" && v.Powertrain == Powertrain.Petrol);
        Plant(Fault.TiredHybridBattery, v => v.Class.Name == "Mid car" && v.Powertrain == Powertrain.Hybrid);
        Plant(Fault.LowTyrePressure, v => v.Class.Name == "Large car" && v.Powertrain == Powertrain.Petrol);
        Plant(Fault.LowTyrePressure, v => v.Class.Name == "Small car" && v.Powertrain == Powertrain.Petrol);
        Plant(Fault.LowTyrePressure, v => v.Class.Name == "Van");
    }

    private static void PlantDeadMeters(List<Vehicle> fleet)
    {
        void Plant(int howMany, Func<Vehicle, bool> where)
        {
            for (int i = 0; i < fleet.Count && howMany > 0; i++)
                if (fleet[i] is { Fault: Fault.None, CityNeverMeasured: false, Runs: >= 3 and <= 14 } v && where(v))
                {
                    fleet[i] = v with { CityNeverMeasured = true };
                    howMany--;
                }
        }
        Plant(5, v => v.Class.Name == VehicleClass.DropoutClass && v.Powertrain != Powertrain.Battery);
        Plant(1, v => v.Class.Name == "Mid car" && v.Powertrain == Powertrain.Diesel);
        Plant(1, v => v.Class.Name == "Small car");
        Plant(1, v => v.Class.Name == "Large SUV");
        Plant(1, v => v.Class.Name == "Pickup");
    }
}
