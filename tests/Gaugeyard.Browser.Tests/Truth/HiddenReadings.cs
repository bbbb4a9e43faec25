using Gaugeyard.Browser.Tests.Driving;

namespace Gaugeyard.Browser.Tests.Truth;

/// <summary>What the city meter would have shown on the runs where it dropped out.</summary>
internal static class HiddenReadings
{
    /// <summary>Vehicle and true city consumption, L/100 km, by run name.</summary>
    public static IReadOnlyDictionary<string, (string Vehicle, double City)> ByRun { get; } =
        File.ReadLines(Path.Combine(Repository.Root, "tests", "Gaugeyard.Browser.Tests", "Truth", "hidden-city-readings.csv")).Skip(1)
            .Select(l => l.Split(',')).ToDictionary(f => f[0], f => (f[1], double.Parse(f[2])));
}

/// <summary>How often intervals hold the truth, with an interval that counts vehicles, not runs.</summary>
/// <param name="Runs">Intervals judged.</param>
/// <param name="Vehicles">Vehicles they belong to.</param>
/// <param name="Rate">Share of intervals that hold the truth.</param>
/// <param name="Low">Lower end of the 95 % interval of the rate.</param>
/// <param name="High">Upper end.</param>
internal sealed record Coverage(int Runs, int Vehicles, double Rate, double Low, double High)
{
    /// <summary>
    /// Ratio estimate with the variance between clusters (Cochran 1977, Sampling Techniques, 3rd ed., section 3.12):
    /// the runs of a vehicle share its peculiarities, so their hits are not independent.
    /// </summary>
    public static Coverage Of(IEnumerable<(string Vehicle, bool Holds)> judged)
    {
        var vehicles = judged.GroupBy(j => j.Vehicle).Select(g => (Hits: g.Count(j => j.Holds), Runs: g.Count())).ToList();
        int runs = vehicles.Sum(v => v.Runs), m = vehicles.Count;
        double rate = vehicles.Sum(v => v.Hits) / (double)runs;
        double squares = vehicles.Sum(v => Math.Pow(v.Hits - rate * v.Runs, 2));
        double error = Math.Sqrt(squares * m / (m - 1)) / runs;
        // 97.5 % point of Student's t; the season has about sixty such vehicles
        double t = m >= 50 ? 2.0 : m >= 30 ? 2.04 : 2.1;
        return new Coverage(runs, m, rate, rate - t * error, rate + t * error);
    }
}
