namespace Gaugeyard.DemoSeason;

/// <summary>
/// Consumption in L/100 km from road load and powertrain, before driver, vehicle and instrument add theirs. Battery
/// vehicles are recorded as litres of petrol of the same energy.
/// </summary>
internal static class Consumption
{
    /// <summary>Energy of a litre of petrol equivalent, kWh: 33.7 kWh per US gallon, rounded.</summary>
    public const double KilowattHoursPerLitre = 8.9;

    private const double PetrolEnergy = 32.0, DieselEnergy = 35.8;

    // work against inertia per metre and kilogram in each trace, m/s^2
    private const double CityPush = 0.156, HighwayPush = 0.032;

    public static (double City, double Highway) Of(Vehicle vehicle, double mass, double pressure, double ambient, bool wet, string route)
    {
        var load = RoadLoad.Of(vehicle, mass, pressure, ambient, wet);
        double hills = route switch { "Ridge road" => 1.05, "Fen loop" => 0.985, _ => 1 };
        double cold = Math.Max(0, 22 - ambient) / 10, hot = Math.Max(0, ambient - 25) / 10;
        // a strong engine idles along at part load
        double partLoad = vehicle.Powertrain == Powertrain.Battery ? 1 : Math.Pow(vehicle.Power * 1000 / (vehicle.KerbMass * 70), 0.14);
        double gearbox = vehicle.Transmission switch { "Manual" => 0.996, "Continuously variable" => 0.993, _ => 1 };
        var way = Way.Of(vehicle);
        double Litres(double force, double push, double kept, double efficiency) =>
            // N per metre of road = J/m = 0.1 MJ per 100 km
            (force + push * mass * 1.03 * (1 - kept)) * 0.1 / efficiency / way.Energy;
        double idle = way.Idles ? 0.24 + 0.22 * vehicle.Displacement : 0;
        double city = Litres(load.InCity * hills, CityPush, way.Kept, way.CityEfficiency) * partLoad * gearbox + idle + way.CityBase;
        double highway = Litres(load.OnHighway * (1 + (hills - 1) * 0.6), HighwayPush, way.Kept, way.HighwayEfficiency) * partLoad * gearbox;
        return (city * (1 + way.ColdCity * cold + 0.03 * hot), highway * (1 + way.ColdHighway * cold + 0.01 * hot));
    }

    /// <summary>How a kind of powertrain turns energy into motion.</summary>
    /// <param name="Energy">MJ per litre.</param>
    /// <param name="Kept">Share of the braking energy that is won back.</param>
    /// <param name="CityBase">Heating, lights and control in town, L/100 km.</param>
    /// <param name="ColdCity">Rise of city consumption per 10 °C below 22 °C.</param>
    private sealed record Way(double Energy, double CityEfficiency, double HighwayEfficiency, double Kept, bool Idles, double CityBase, double ColdCity, double ColdHighway)
    {
        public static Way Of(Vehicle vehicle) => vehicle.Powertrain switch
        {
            Powertrain.Diesel => new Way(DieselEnergy, 0.205, 0.312, 0, true, 0, 0.042, 0.010),
            Powertrain.Hybrid => new Way(PetrolEnergy, 0.252, 0.292, vehicle.Fault == Fault.TiredHybridBattery ? 0.05 : 0.52, vehicle.Fault == Fault.TiredHybridBattery, 0.15, 0.075, 0.015),
            Powertrain.Battery => new Way(KilowattHoursPerLitre * 3.6, 0.78, 0.83, 0.60, false, 0.14, 0.105, 0.035),
            _ => new Way(PetrolEnergy, 0.182, 0.272, 0, true, 0, 0.048, 0.012),
        };
    }
}
