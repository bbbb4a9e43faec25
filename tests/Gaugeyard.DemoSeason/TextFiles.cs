using System.Text;

namespace Gaugeyard.DemoSeason;

/// <summary>Writes the text files; lines end in LF, or in CR LF where the other site's program does so.</summary>
internal static class TextFiles
{
    /// <summary>The whole season, comma separated, UTF-8, names in the first row and units in the second.</summary>
    public static byte[] Season(IReadOnlyList<Run> runs)
    {
        var text = new StringBuilder();
        text.AppendJoin(',', Column.All.Select(c => c.Name)).Append('\n');
        text.AppendJoin(',', Column.All.Select(c => c.Unit)).Append('\n');
        foreach (var run in runs)
            text.AppendJoin(',', Column.All.Select(c => c.Written(run) switch
            {
                null => "",
                DateTime at => at.ToString("yyyy-MM-dd HH:mm"),
                double number => c.NumberText(run, number),
                var other => Quoted((string)other, ','),
            })).Append('\n');
        return Encoding.UTF8.GetBytes(text.ToString());
    }

    /// <summary>The second site's batch: semicolons, decimal commas, d.m.yyyy, Windows-1252.</summary>
    public static byte[] LaterBatch(IReadOnlyList<Run> runs)
    {
        Encoding.RegisterProvider(CodePagesEncodingProvider.Instance);
        var text = new StringBuilder();
        text.AppendJoin(';', Column.All.Select(c => c.Name)).Append("\r\n");
        text.AppendJoin(';', Column.All.Select(c => c.Unit)).Append("\r\n");
        foreach (var run in runs)
            text.AppendJoin(';', Column.All.Select(c => c.Written(run) switch
            {
                null => "",
                DateTime at => at.ToString("d.M.yyyy HH:mm"),
                double number => c.NumberText(run, number).Replace('.', ','),
                var other => Quoted((string)other, ';'),
            })).Append("\r\n");
        return Encoding.GetEncoding(1252).GetBytes(text.ToString());
    }

    /// <summary>What the city meter would have shown where it dropped out.</summary>
    public static byte[] Truth(IReadOnlyList<Run> runs)
    {
        var text = new StringBuilder("Run,Vehicle,City consumption\n");
        foreach (var run in runs.Where(r => r.Lost.Contains(Column.City)))
            text.Append(run.Name).Append(',').Append(run.Vehicle.Label).Append(',').Append(run.City.ToString("0.00")).Append('\n');
        return Encoding.UTF8.GetBytes(text.ToString());
    }

    /// <summary>What was planted: cells written wrongly, and vehicles with a fault on all their runs.</summary>
    public static byte[] Planted(IReadOnlyList<Slip> slips, IReadOnlyList<Vehicle> fleet)
    {
        var text = new StringBuilder("Run,Vehicle,Column,Right,Written,Cause\n");
        foreach (var slip in slips.OrderBy(s => s.Run, StringComparer.Ordinal))
            text.Append($"{slip.Run},,{slip.Column},{slip.Right:0.##},{slip.Written:0.##},{slip.Cause}\n");
        foreach (var vehicle in fleet)
            if (vehicle.Fault != Fault.None)
                text.Append($",{vehicle.Label},,,,{vehicle.Fault switch { Fault.DraggingBrake => "dragging brake", Fault.LowTyrePressure => "tyre pressure 30 % low", _ => "tired hybrid battery" }} on all runs\n");
        foreach (var vehicle in fleet)
            if (vehicle.CityNeverMeasured)
                text.Append($",{vehicle.Label},{Column.City},,,city meter dead on all runs\n");
        return Encoding.UTF8.GetBytes(text.ToString());
    }

    private static string Quoted(string text, char separator) =>
        text.Contains(separator) || text.Contains('"') ? $"\"{text.Replace("\"", "\"\"")}\"" : text;
}
