using ClosedXML.Excel;

namespace Gaugeyard.Browser.Tests.Truth;

/// <summary>A filled cell as the workbook tells it.</summary>
internal sealed record FilledCell(string Run, double Value, double Low, double High, bool Shaded);

/// <summary>A handed-over workbook, read by a library that knows nothing of the portal.</summary>
internal sealed class HandedOver
{
    private HandedOver(IReadOnlyList<FilledCell> filled, IReadOnlyList<string> sheets, int records) => (Filled, Sheets, Records) = (filled, sheets, records);

    /// <summary>Cells of the city column whose state column says filled.</summary>
    public IReadOnlyList<FilledCell> Filled { get; }

    public IReadOnlyList<string> Sheets { get; }

    public int Records { get; }

    public static HandedOver Open(string path, string column)
    {
        using var workbook = new XLWorkbook(path);
        var sheet = workbook.Worksheet("Records");
        var names = sheet.Row(1).CellsUsed().ToDictionary(c => c.GetString(), c => c.Address.ColumnNumber);
        var filled = new List<FilledCell>();
        int records = 0;
        foreach (var row in sheet.RowsUsed().Skip(1))
        {
            records++;
            if (row.Cell(names[column + " state"]).GetString() != "filled")
                continue;
            var cell = row.Cell(names[column]);
            filled.Add(new FilledCell(
                row.Cell(names["Run"]).GetString(),
                cell.GetDouble(),
                row.Cell(names[column + " low"]).GetDouble(),
                row.Cell(names[column + " high"]).GetDouble(),
                cell.Style.Fill.PatternType == XLFillPatternValues.Solid));
        }
        return new HandedOver(filled, [.. workbook.Worksheets.Select(s => s.Name)], records);
    }

    /// <summary>Compares the intervals with what the meter would have shown.</summary>
    public Coverage AgainstTruth() => Coverage.Of(Filled.Select(f =>
    {
        var (vehicle, city) = HiddenReadings.ByRun[f.Run];
        return (vehicle, f.Low <= city && city <= f.High);
    }));
}
