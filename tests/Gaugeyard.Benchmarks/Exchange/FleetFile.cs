using System.Globalization;

namespace Gaugeyard.Benchmarks.Exchange;

/// <summary>
/// A synthetic fleet file of any length: 20 mixed columns, 5 % of the cells of the last fifteen missing. Every cell is a pure
/// function of row and column (the finaliser of SplitMix64), so any language can make the same file.
/// </summary>
internal static class FleetFile
{
    private static readonly string[] Makes = ["Alder", "Birch", "Cedar", "Dahlia", "Elm", "Fir", "Ginkgo", "Hazel", "Ivy", "Juniper", "Kapok", "Larch"];
    private static readonly string[] Fuels = ["petrol", "diesel", "hybrid", "electric", "lpg"];
    private static readonly string[] Bodies = ["small", "compact", "midsize", "large", "van", "pickup", "suv"];
    private static readonly string[] Tyres = ["summer", "winter", "all-season"];
    private static readonly string[] Sites = ["north", "south", "east", "west", "alpine", "coast", "desert", "city"];

    public static void Write(string path, int rows)
    {
        using var writer = new StreamWriter(path) { NewLine = "\n" };
        writer.WriteLine("record_id,vehicle_id,test_date,make,fuel,body,tyre,site,model_year,odometer_km,mass_kg,power_kw,displacement_l,temp_c,wind_ms,speed_kmh,l_per_100km,co2_g_km,noise_db,passed");
        for (int row = 0; row < rows; row++)
            writer.WriteLine(Line((ulong)row));
    }

    private static string Line(ulong row)
    {
        ulong Hash(int column)
        {
            ulong z = unchecked((row * 32 + (ulong)(column + 1)) * 0x9E3779B97F4A7C15UL);
            z = unchecked((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9UL);
            z = unchecked((z ^ (z >> 27)) * 0x94D049BB133111EBUL);
            return z ^ (z >> 31);
        }

        double Uniform(int column) => (Hash(column) >> 11) / 9007199254740992.0;

        // Irwin-Hall of the hash's four 16-bit fields, close to normal
        double Normal(int column)
        {
            ulong x = Hash(column);
            double sum = 0;
            for (int k = 0; k < 64; k += 16)
                sum += ((x >> k) & 0xFFFF) / 65536.0;
            return (sum - 2) * Math.Sqrt(3);
        }

        int Pick(int column, int count) => (int)(Uniform(column) * count);

        int body = Pick(5, 7), fuel = Pick(4, 5);
        double mass = Math.Round(1100 + 160 * body + 120 * Normal(10));
        double power = Math.Round(60 + 0.06 * mass + 20 * Normal(11), 1);
        double ambient = Math.Round(12 + 9 * Normal(13), 1);
        double speed = Math.Round(30 + 90 * Uniform(15), 1);
        double litres = Math.Round(2.5 + 0.0028 * mass + 0.01 * power + 0.00025 * (speed - 70) * (speed - 70) - 0.01 * ambient - 0.6 * fuel / 4 + 0.7 * Normal(16), 3);
        string[] cells =
        [
            Text(row + 1), $"V{Pick(1, 20_000):00000}", new DateTime(2015, 1, 1).AddDays(Pick(2, 3650)).ToString("yyyy-MM-dd", CultureInfo.InvariantCulture),
            Makes[Pick(3, 12)], Fuels[fuel], Bodies[body], Tyres[Pick(6, 3)], Sites[Pick(7, 8)], Text(1998 + Pick(8, 26)), Text(Math.Floor(Uniform(9) * 250_000)), Text(mass), Text(power),
            Text(Math.Round(0.9 + 0.012 * power + 0.2 * Normal(12), 2)), Text(ambient), Text(Math.Round(Math.Abs(3 * Normal(14)), 1)), Text(speed), Text(litres),
            Text(Math.Round(23.2 * litres + 4 * Normal(17), 1)), Text(Math.Round(62 + 0.1 * speed + 1.5 * Normal(18), 1)), Uniform(19) < 0.93 ? "Y" : "N",
        ];
        for (int column = 5; column < 20; column++)
            if (((Hash(20 + column % 12) >> (column < 12 ? 0 : 32)) & 0xFFFF) < 3277)
                cells[column] = "";
        return string.Join(',', cells);
    }

    private static string Text(double value) => value.ToString("R", CultureInfo.InvariantCulture);
}
