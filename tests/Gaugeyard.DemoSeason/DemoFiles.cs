namespace Gaugeyard.DemoSeason;

/// <summary>All files of the demo season, made from one seed.</summary>
public static class DemoFiles
{
    private const ulong Seed = 4711_2031;

    /// <summary>Name and bytes of each file for the demo folder.</summary>
    public static IReadOnlyList<(string Name, byte[] Bytes)> ForUsers { get; }

    /// <summary>Name and bytes of each file that only tests may see.</summary>
    public static IReadOnlyList<(string Name, byte[] Bytes)> ForTests { get; }

#pragma warning disable CA1810 // both lists come from one draw
    static DemoFiles()
#pragma warning restore CA1810
    {
        // each stage has its own dice, so that a change to one leaves the others as they were
        var fleet = Fleet.Draw(new Dice(Seed));
        var runs = Season.Drive(new Dice(Seed + 1), fleet, new DateTime(2031, 1, 8), 340, "OM4");
        Mishaps.LoseReadings(new Dice(Seed + 2), runs);
        var slips = Mishaps.Miswrite(new Dice(Seed + 3), runs);

        var visitors = fleet.Where((v, i) => i % 7 == 3 && v.Fault == Fault.None).Select(v => v with { Runs = 1 + v.Runs % 9, CityNeverMeasured = false, Odometer = v.Odometer + 9000 }).ToList();
        var later = Season.Drive(new Dice(Seed + 4), visitors, new DateTime(2032, 2, 2), 60, "LB1", warmest: 205);
        Mishaps.LoseReadings(new Dice(Seed + 5), later);
        string[] sayings = ["vent de travers à la digue", "Räder gewechselt", "brouillard jusqu’à 10 h", "gates opened late – café stop"];
        var dice = new Dice(Seed + 6);
        foreach (var run in later.Where(_ => dice.Chance(0.1)))
            run.Remarks = dice.Pick(sayings);

        ForUsers =
        [
            ("ottermoor-season-4.csv", TextFiles.Season(runs)),
            ("ottermoor-season-4.xlsx", MessyWorkbook.Write(runs, new Dice(Seed + 7))),
            ("lisbraten-winter-batch.csv", TextFiles.LaterBatch(later)),
        ];
        ForTests =
        [
            ("hidden-city-readings.csv", TextFiles.Truth(runs)),
            ("planted-causes.csv", TextFiles.Planted(slips, fleet)),
        ];
    }
}
