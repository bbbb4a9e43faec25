using System.Text;
using Xunit;

namespace Gaugeyard.DemoSeason.Tests;

/// <summary>The season has what its dictionary promises, in bands that the trade would believe.</summary>
public class PlausibilityTests
{
    // the row below the names holds the units
    private static readonly List<Dictionary<string, string>> Runs = [.. Read(DemoFiles.ForUsers.Single(f => f.Name == "ottermoor-season-4.csv").Bytes).Skip(1)];
    private static readonly List<Dictionary<string, string>> Hidden = Read(DemoFiles.ForTests.Single(f => f.Name == "hidden-city-readings.csv").Bytes);

    [Fact]
    public void The_season_has_its_size()
    {
        var perVehicle = Runs.GroupBy(r => r["Vehicle"]).Select(g => g.Count()).ToList();
        Assert.Equal(160, perVehicle.Count);
        Assert.InRange(Runs.Count, 1900, 2100);
        Assert.InRange(perVehicle.Min(), 1, 2);
        Assert.InRange(perVehicle.Max(), 28, 30);
        Assert.Equal(Runs.Count, Runs.Select(r => r["Run"]).Distinct().Count());
    }

    // typical city and highway consumption of light vehicles by class, L/100 km
    [Theory]
    [InlineData("Small car", 6, 8.5, 4.5, 6.5)]
    [InlineData("Mid car", 7, 10, 5, 7.5)]
    [InlineData("Large car", 9, 13, 6.5, 9)]
    [InlineData("Compact SUV", 8, 12, 6.5, 9.5)]
    [InlineData("Large SUV", 11, 17, 8.5, 12.5)]
    [InlineData("Pickup", 11, 17, 8.5, 12.5)]
    public void Petrol_vehicles_lie_in_the_usual_bands(string kind, double cityLow, double cityHigh, double highwayLow, double highwayHigh)
    {
        var runs = Runs.Where(r => r["Class"] == kind && r["Powertrain"] == "Petrol").ToList();
        Assert.InRange(Median(runs, "City consumption"), cityLow, cityHigh);
        Assert.InRange(Median(runs, "Highway consumption"), highwayLow, highwayHigh);
    }

    [Fact]
    public void Hybrids_and_battery_vehicles_are_better_in_the_city_and_others_on_the_highway()
    {
        foreach (string powertrain in new[] { "Petrol", "Diesel", "Hybrid", "Battery" })
        {
            var runs = Runs.Where(r => r["Powertrain"] == powertrain).ToList();
            double ratio = Median(runs, "City consumption") / Median(runs, "Highway consumption");
            Assert.Equal(powertrain is "Hybrid" or "Battery", ratio < 1);
        }
    }

    [Fact]
    public void Vans_and_pickups_are_closer_to_each_other_than_to_any_car()
    {
        double City(string kind) => Median(Runs.Where(r => r["Class"] == kind && r["Powertrain"] == "Diesel").ToList(), "City consumption");
        Assert.True(Math.Abs(City("Van") - City("Pickup")) < City("Van") - City("Large car"));
        Assert.True(City("Van") - City("Large car") > 0);
    }

    [Fact]
    public void City_readings_are_missing_more_often_in_the_cold_and_in_one_class()
    {
        double Share(Func<Dictionary<string, string>, bool> where)
        {
            var some = Runs.Where(where).ToList();
            return some.Count(r => r["City consumption"] == "") / (double)some.Count;
        }
        Assert.InRange(Share(_ => true), 0.06, 0.10);
        Assert.True(Share(r => Number(r["Ambient temperature"]) < 4) > 1.5 * Share(r => Number(r["Ambient temperature"]) >= 4));
        Assert.True(Share(r => r["Class"] == "Compact SUV") > 1.5 * Share(r => r["Class"] != "Compact SUV"));
        Assert.Equal(Runs.Where(r => r["City consumption"] == "").Select(r => r["Run"]), Hidden.Select(r => r["Run"]));
    }

    [Fact]
    public void Every_planted_slip_stands_in_the_season()
    {
        var slips = Read(DemoFiles.ForTests.Single(f => f.Name == "planted-causes.csv").Bytes).Where(s => s["Run"].Length > 0).ToList();
        Assert.True(slips.Count >= 15);
        foreach (var slip in slips)
            Assert.Equal(slip["Written"], Runs.Single(r => r["Run"] == slip["Run"])[slip["Column"]]);
    }

    [Fact]
    public void The_later_batch_is_Windows_1252_with_decimal_commas()
    {
        byte[] bytes = DemoFiles.ForUsers.Single(f => f.Name == "lisbraten-winter-batch.csv").Bytes;
        Assert.Throws<DecoderFallbackException>(() => new UTF8Encoding(false, throwOnInvalidBytes: true).GetString(bytes));
        string text = Encoding.GetEncoding(1252).GetString(bytes);
        Assert.Contains(";°C;", text);
        Assert.Matches(@"\n[^\n;]+;\d{1,2}\.\d{1,2}\.2032 \d\d:\d\d;", text);
        Assert.DoesNotMatch(@";\d+\.\d+;", text);
    }

    private static double Median(List<Dictionary<string, string>> runs, string column)
    {
        var values = runs.Select(r => Number(r[column])).Where(v => !double.IsNaN(v)).Order().ToList();
        return values[values.Count / 2];
    }

    private static double Number(string text) => text.Length == 0 ? double.NaN : double.Parse(text);

    private static List<Dictionary<string, string>> Read(byte[] csv)
    {
        string[] lines = Encoding.UTF8.GetString(csv).TrimEnd('\n').Split('\n');
        string[] names = lines[0].Split(',');
        // the only quoted texts are remarks, in the last column
        return [.. lines.Skip(1).Select(l => names.Zip(l.Split(',')).ToDictionary(p => p.First, p => p.Second))];
    }
}
