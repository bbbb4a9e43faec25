using System.Globalization;
using System.Text.Json;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Reference;

/// <summary>
/// Reference figures computed with independent open libraries (named with their versions in each file's "software" field)
/// on open data sets (data/README.md says where each comes from).
/// </summary>
internal static class ReferenceCases
{
    private static readonly string Folder = Path.Combine(AppContext.BaseDirectory, "Reference");

    public static IEnumerable<(string Id, JsonElement Case)> Of(string topic)
    {
        using var document = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(Folder, "cases", topic + ".json")));
        foreach (var c in document.RootElement.GetProperty("cases").EnumerateArray())
            yield return (c.GetProperty("id").GetString()!, c.Clone());
    }

    /// <summary>A data file as columns of texts; null for an empty cell or NA.</summary>
    public static Dictionary<string, string?[]> Data(string file)
    {
        string[] lines = File.ReadAllLines(Path.Combine(Folder, "data", file));
        string[] names = Split(lines[0]);
        var rows = lines.Skip(1).Where(l => l.Length > 0).Select(Split).ToArray();
        return names.Select((n, j) => (n, rows.Select(r => r[j] is "" or "NA" ? null : r[j]).ToArray())).ToDictionary(x => x.n, x => x.Item2);
    }

    public static double Number(string? text) => text is null ? double.NaN : double.Parse(text, CultureInfo.InvariantCulture);

    public static double Number(JsonElement e) => e.ValueKind == JsonValueKind.Number ? e.GetDouble()
        : e.ValueKind == JsonValueKind.String ? (e.GetString() == "Inf" ? double.PositiveInfinity : double.Parse(e.GetString()!, CultureInfo.InvariantCulture)) : double.NaN;

    public static double[] Numbers(JsonElement e) => e.ValueKind == JsonValueKind.Array ? [.. e.EnumerateArray().Select(Number)] : [Number(e)];

    /// <summary>Fails unless both numbers agree to a relative (or tiny absolute) tolerance.</summary>
    public static void Near(double expected, double actual, double relative, string what, double absolute = 1e-13)
    {
        if (double.IsNaN(expected) && double.IsNaN(actual))
            return;
        Assert.True(Math.Abs(expected - actual) <= Math.Max(relative * Math.Max(Math.Abs(expected), Math.Abs(actual)), absolute), $"{what}: {actual:R} where {expected:R} was expected");
    }

    private static string[] Split(string line)
    {
        var cells = new List<string>();
        int at = 0;
        while (at <= line.Length)
        {
            if (at < line.Length && line[at] == '"')
            {
                int end = line.IndexOf('"', at + 1);
                cells.Add(line[(at + 1)..end]);
                at = end + 2;
            }
            else
            {
                int end = line.IndexOf(',', at);
                if (end < 0)
                    end = line.Length;
                cells.Add(line[at..end]);
                at = end + 1;
            }
        }
        return [.. cells];
    }
}
