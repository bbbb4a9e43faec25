namespace Gaugeyard.DemoSeason;

/// <summary>A cell that was written wrongly, and how.</summary>
internal sealed record Slip(string Run, string Column, double Right, double Written, string Cause);

/// <summary>Loses readings and miswrites cells, each for a reason that the dictionary names.</summary>
internal static class Mishaps
{
    private const double GallonMile = 235.214583; // mi/gal (US) and L/100 km turn into each other by this

    private static readonly string[] Sayings =
    [
        "gusts from the fen", "logger restarted before the run", "hail, run cut short", "second lap repeated", "marshal stop at gate 3", "new driver briefed",
        "pump display hard to read", "sheep near the ridge road", "window open on lap 1", "fog until 9:30", "tyres checked warm", "=see sheet 14", "sun low on the oval",
    ];

    public static void LoseReadings(Dice dice, List<Run> runs)
    {
        foreach (var run in runs)
        {
            double chance = 0.031 * (run.Ambient < 4 ? 4.5 : 1) * (run.Vehicle.Class.Name == VehicleClass.DropoutClass ? 2.3 : 1);
            bool dropped = dice.Chance(chance);
            if (run.Vehicle.CityNeverMeasured || dropped && run.Vehicle.Fault == Fault.None)
                run.Lost.Add(Column.City);
            Lose(run, Column.Highway, 0.012);
            Lose(run, Column.Pressure, 0.012);
            Lose(run, Column.Ambient, 0.004);
            Lose(run, Column.LoadState, 0.005);
            Lose(run, Column.Odometer, 0.008);
            Lose(run, Column.Fuel, 0.006);
            if (dice.Chance(0.07))
                run.Remarks = dice.Pick(Sayings);
            if (run.Vehicle.Fault == Fault.DraggingBrake && dice.Chance(0.3))
                run.Remarks = "hot smell at the rear left wheel";
        }
        void Lose(Run run, string column, double p)
        {
            if (dice.Chance(p))
                run.Lost.Add(column);
        }
    }

    public static List<Slip> Miswrite(Dice dice, List<Run> runs)
    {
        var slips = new List<Slip>();
        var whole = runs.Where(r => r.Lost.Count == 0 && r.Vehicle.Fault == Fault.None && r.Vehicle.Powertrain != Powertrain.Battery).ToList();
        Run Next(Func<Run, bool>? wanted = null)
        {
            int at;
            do
                at = dice.Below(whole.Count);
            while (wanted is not null && !wanted(whole[at]));
            var run = whole[at];
            whole.RemoveAt(at);
            return run;
        }
        void Write(Run run, string column, double right, double written, string cause)
        {
            run.Miswritten[column] = written;
            slips.Add(new Slip(run.Name, column, right, written, cause));
        }
        for (int i = 0; i < 2; i++)
            if (Next() is var run)
                Write(run, Column.City, run.City, Math.Round(run.City / 10, 2), "decimal point one place to the left");
        for (int i = 0; i < 2; i++)
            if (Next() is var run)
                Write(run, Column.Highway, run.Highway, Math.Round(run.Highway / 10, 2), "decimal point one place to the left");
        for (int i = 0; i < 2; i++)
            if (Next() is var run)
                Write(run, Column.Fuel, run.Fuel, Math.Round(run.Fuel * 10, 1), "decimal point one place to the right");
        for (int i = 0; i < 2; i++)
            if (Next() is var run)
            {
                Write(run, Column.City, run.City, Math.Round(GallonMile / run.City, 1), "written in mi/gal (US)");
                Write(run, Column.Highway, run.Highway, Math.Round(GallonMile / run.Highway, 1), "written in mi/gal (US)");
            }
        for (int i = 0; i < 3; i++)
            if (Next() is var run)
            {
                Write(run, Column.City, run.City, run.Highway, "city and highway in each other's place");
                Write(run, Column.Highway, run.Highway, run.City, "city and highway in each other's place");
            }
        for (int i = 0; i < 6; i++)
            if (Next() is var run)
                Write(run, Column.Pressure, run.Pressure, Math.Round(run.Pressure / 100, 2), "written in bar");
        for (int i = 0; i < 2; i++)
            if (Next(r => (int)r.Mass / 100 % 10 > (int)r.Mass / 1000) is var run)
                Write(run, Column.Mass, run.Mass, Transposed(run.Mass), "first two digits transposed");
        return slips;
    }

    // 1470 becomes 4170
    private static double Transposed(double mass)
    {
        char[] digits = $"{mass:0000}".ToCharArray();
        (digits[0], digits[1]) = (digits[1], digits[0]);
        return double.Parse(digits);
    }
}
