using System.Globalization;
using System.Text;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Analysis.Wording;

namespace Gaugeyard.Portal.Pages.Matrix;

/// <summary>The figures of the Pairs page as tables of text: first row is the head.</summary>
internal static class PairsTables
{
    public static IReadOnlyList<IReadOnlyList<string>> Standouts(StandoutsAnswer answer, int most = int.MaxValue)
    {
        var rows = new List<IReadOnlyList<string>> { new[] { "Record", "Name", "Vehicle", "Distance", "Chance", "Readings concerned", "Why" } };
        foreach (var r in answer.Records.Take(most))
            rows.Add([r.Record.ToString(CultureInfo.InvariantCulture), r.Label, r.Vehicle ?? "", Say.Number(r.Distance, 1), Say.P(r.P), string.Join(", ", r.Cells), r.Why]);
        return rows;
    }

    /// <summary>The stand-outs as comma-separated text at full precision. A text that a spreadsheet would take for a formula gets an apostrophe.</summary>
    public static string Csv(StandoutsAnswer answer)
    {
        var text = new StringBuilder("record,name,vehicle,distance,p,q,readings,why\r\n");
        foreach (var r in answer.Records)
            text.AppendJoin(',', r.Record.ToString(CultureInfo.InvariantCulture), Cell(r.Label), Cell(r.Vehicle ?? ""), Number(r.Distance), Number(r.P), Number(r.Q), Cell(string.Join("; ", r.Cells)), Cell(r.Why)).Append("\r\n");
        return text.ToString();
    }

    private static string Number(double value) => value.ToString("R", CultureInfo.InvariantCulture);

    private static string Cell(string text)
    {
        if (text.Length > 0 && "=+-@\t\r".Contains(text[0], StringComparison.Ordinal))
            text = "'" + text;
        return text.AsSpan().IndexOfAny("\",\r\n") >= 0 ? "\"" + text.Replace("\"", "\"\"", StringComparison.Ordinal) + "\"" : text;
    }
}
