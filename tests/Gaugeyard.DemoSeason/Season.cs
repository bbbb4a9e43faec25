namespace Gaugeyard.DemoSeason;

/// <summary>Drives the fleet through a season, and lets instruments and people fail as they do.</summary>
internal static class Season
{
    private static readonly string[] Routes = ["Town loop", "Ridge road", "Fen loop"];
    private static readonly double[] Hours = [7.5, 9.25, 11, 13.5, 15.25, 17];

    /// <param name="first">First day.</param>
    /// <param name="days">Length of the season.</param>
    /// <param name="prefix">Run names are this and a number.</param>
    public static List<Run> Drive(Dice dice, IReadOnlyList<Vehicle> fleet, DateTime first, int days, string prefix, int warmest = 195)
    {
        var drivers = Enumerable.Range(1, 14).Select(i => (Name: $"D{i:00}", Factor: 1 + 0.013 * dice.Normal())).ToArray();
        var weather = Enumerable.Range(0, days).Select(d => new Day(first.AddDays(d), warmest, dice)).ToArray();
        var runs = new List<Run>();
        foreach (var vehicle in fleet)
        {
            int window = Math.Min(days, 25 + dice.Below(120)), begin = dice.Below(days - window + 1);
            var taken = new HashSet<(int, int)>();
            for (int k = 0; k < vehicle.Runs; k++)
            {
                int day, hour;
                do
                    (day, hour) = (begin + dice.Below(window), dice.Below(Hours.Length));
                while (!taken.Add((day, hour)));
                runs.Add(DriveOne(dice, vehicle, weather[day], Hours[hour], dice.Pick(drivers)));
            }
        }
        runs.Sort((a, b) => a.Start != b.Start ? a.Start.CompareTo(b.Start) : string.CompareOrdinal(a.Vehicle.Label, b.Vehicle.Label));
        var odometers = new Dictionary<string, double>();
        for (int i = 0; i < runs.Count; i++)
        {
            runs[i].Name = $"{prefix}-{i + 1:0000}";
            string label = runs[i].Vehicle.Label;
            odometers[label] = odometers.GetValueOrDefault(label, runs[i].Vehicle.Odometer) + runs[i].Distance + dice.Below(40);
            runs[i].Odometer = (int)odometers[label];
        }
        return runs;
    }

    private static Run DriveOne(Dice dice, Vehicle vehicle, Day day, double hour, (string Name, double Factor) driver)
    {
        double ambient = Math.Round(day.Mean + 3.5 * Math.Sin((hour - 9) / 24 * 2 * Math.PI) + 0.7 * dice.Normal(), 1);
        bool wet = dice.Chance(day.Wetness);
        string load = new[] { "Empty", "Half", "Full" }[dice.Weighted([0.45, 0.35, 0.20])];
        double mass = Math.Round(vehicle.KerbMass + 85 + vehicle.Class.Payload * (load switch { "Full" => 1, "Half" => 0.5, _ => 0 }) + 8 * dice.Normal());
        double placard = vehicle.Fault == Fault.LowTyrePressure ? vehicle.Pressure * 0.70 : vehicle.Pressure;
        // air in the tyre follows the weather, and people check it now and then
        double pressure = Math.Round(placard + 0.9 * (ambient - 15) + 7 * dice.Normal());
        string route = Routes[dice.Weighted([0.5, 0.25, 0.25])];
        var (city, highway) = Consumption.Of(vehicle, mass, pressure, ambient, wet, route);
        city = Math.Round(city * vehicle.CityFactor * driver.Factor * (1 + 0.018 * dice.Normal()), 2);
        highway = Math.Round(highway * vehicle.HighwayFactor * (1 + (driver.Factor - 1) * 0.7) * (1 + 0.014 * dice.Normal()), 2);
        double distance = Math.Round(dice.Between(38, 150) * (vehicle.Powertrain == Powertrain.Battery ? 0.8 : 1), 1);
        double cityShare = route == "Town loop" ? 0.6 : 0.42;
        // weighed at the pump after the run, not taken from the meter that gives the two consumptions
        double fuel = Math.Round(distance / 100 * (cityShare * city + (1 - cityShare) * highway) * (1 + 0.025 * dice.Normal()), 2);
        return new Run
        {
            Start = day.Date.AddHours(hour).AddMinutes(dice.Below(9) * 5),
            Vehicle = vehicle,
            LoadState = load,
            Driver = driver.Name,
            Route = route,
            Wet = wet,
            Mass = mass,
            Ambient = ambient,
            Pressure = pressure,
            Distance = distance,
            Fuel = fuel,
            City = city,
            Highway = highway,
        };
    }

    /// <summary>The weather of one day.</summary>
    private sealed class Day
    {
        public Day(DateTime date, int warmest, Dice dice)
        {
            Date = date;
            Mean = 8.5 + 11.5 * Math.Cos((date.DayOfYear - warmest) / 365.0 * 2 * Math.PI) + 3.2 * dice.Normal();
            Wetness = dice.Chance(0.35) ? 0.75 : 0.08;
        }

        public DateTime Date { get; }

        public double Mean { get; }

        public double Wetness { get; }
    }
}
