namespace Gaugeyard.DemoSeason;

/// <summary>
/// Resistance to motion F(v) = F0 + F1 v + F2 v^2 in newtons, v in metres per second: rolling resistance, losses of the
/// driveline, and air.
/// </summary>
internal readonly record struct RoadLoad(double F0, double F1, double F2)
{
    private const double Gravity = 9.81;

    // speed in m/s and share of the distance driven at it
    private static readonly (double Speed, double Share)[] City = [(4, 0.12), (8, 0.28), (12, 0.42), (15, 0.18)];
    private static readonly (double Speed, double Share)[] Highway = [(19, 0.10), (24, 0.30), (28, 0.45), (31, 0.15)];

    /// <summary>The road load of a vehicle in the conditions of a run.</summary>
    /// <param name="mass">Kilograms.</param>
    /// <param name="pressure">Tyre pressure in kPa.</param>
    /// <param name="ambient">Degrees Celsius.</param>
    public static RoadLoad Of(Vehicle vehicle, double mass, double pressure, double ambient, bool wet)
    {
        double rolling = vehicle.Tyre switch { "Low-drag" => 0.0078, "Summer" => 0.0092, "All-season" => 0.0099, _ => 0.0108 };
        // rolling resistance falls with pressure and with the warmth of the tyre; water on the road adds to it
        rolling *= Math.Sqrt(vehicle.Pressure / pressure) * (1 + 0.006 * (20 - ambient)) * (wet ? 1.10 : 1);
        double driveline = vehicle.Drive == "All" ? 1.35 : 0.9;
        double density = 1.204 * 293.15 / (273.15 + ambient);
        double brake = vehicle.Fault == Fault.DraggingBrake ? 105 : 0;
        return new RoadLoad(mass * Gravity * rolling + brake, driveline, 0.5 * density * vehicle.Drag * vehicle.Area);
    }

    private double Mean((double Speed, double Share)[] trace)
    {
        double sum = 0;
        foreach (var (speed, share) in trace)
            sum += share * (F0 + F1 * speed + F2 * speed * speed);
        return sum;
    }

    /// <summary>Mean resistance over the city trace, N.</summary>
    public double InCity => Mean(City);

    /// <summary>Mean resistance over the highway trace, N.</summary>
    public double OnHighway => Mean(Highway);
}
