using System.Globalization;
using System.Text;
using ClosedXML.Excel;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Exchange.Tests;

/// <summary>The demo season's files are read without overruling anything.</summary>
public class DemoDataTests
{
    private static string Folder()
    {
        string? at = AppContext.BaseDirectory;
        while (at is not null && !Directory.Exists(Path.Combine(at, "demo-data")))
            at = Path.GetDirectoryName(at);
        return Path.Combine(at ?? throw new DirectoryNotFoundException("demo-data"), "demo-data");
    }

    private static ImportedTable Read(string name) => TableReader.Read(Path.Combine(Folder(), name), name);

    private static readonly ColumnKind[] Kinds =
    [
        ColumnKind.Text, ColumnKind.DateTime, ColumnKind.Category, ColumnKind.Category, ColumnKind.Category, ColumnKind.Category, ColumnKind.Category, ColumnKind.Category, ColumnKind.Number, ColumnKind.OrderedCategory,
        ColumnKind.Category, ColumnKind.Category, ColumnKind.YesNo, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number, ColumnKind.Number,
        ColumnKind.Number, ColumnKind.Number, ColumnKind.Text,
    ];

    private static readonly string?[] Units = [null, null, null, null, null, null, null, null, "kPa", null, null, null, null, "kg", "L", "kW", "m²", "°C", "km", "km", "L", "L/100km", "L/100km", null];

    [Theory]
    [InlineData("ottermoor-season-4.csv")]
    [InlineData("ottermoor-season-4.xlsx")]
    [InlineData("lisbraten-winter-batch.csv")]
    public void KindsUnitsAndRoles(string name)
    {
        var table = Read(name);
        Assert.Equal(Kinds, table.Columns.Select(c => c.Definition.Kind));
        Assert.Equal(Units, table.Columns.Select(c => c.Definition.Unit));
        Assert.Equal(ColumnRole.RunName, table.Columns[0].Definition.Role);
        Assert.Equal(ColumnRole.Vehicle, table.Columns[2].Definition.Role);
        Assert.Equal(ColumnRole.Distance, table.Columns[19].Definition.Role);
        Assert.Equal([ColumnRole.Reading, ColumnRole.Reading, ColumnRole.Reading, ColumnRole.Note], table.Columns.Skip(20).Select(c => c.Definition.Role));
        Assert.Equal(["Empty", "Half", "Full"], table.Columns[9].Definition.Levels!);
        Assert.Empty(table.Reading.Doubts);
        Assert.DoesNotContain(table.Findings, f => f.Severity == Severity.Error);
    }

    [Fact]
    public void TheMessyWorkbookHoldsWhatTheCleanFileHolds()
    {
        var clean = Read("ottermoor-season-4.csv");
        var messy = Read("ottermoor-season-4.xlsx");
        Assert.Equal("Runs", messy.Reading.Sheet);
        Assert.Equal(clean.Records, messy.Records);
        for (int c = 0; c < clean.Columns.Count; c++)
            for (int row = 0; row < clean.Records; row++)
            {
                string? was = clean.Columns[c].TextAt(row), now = messy.Columns[c].TextAt(row);
                Assert.True(was == now, $"{clean.Columns[c].Name}, record {row + 1}: '{was}' in the clean file, '{now}' in the workbook");
            }
        Assert.Contains(messy.Reading.LeftOut, r => r.Text.StartsWith("Total", StringComparison.Ordinal));
        Assert.Contains(messy.Marks.Values.SelectMany(m => m.Values), m => m.Original is { } text && text.EndsWith('*'));
        Assert.Contains(messy.Findings, f => f.Text.Contains("'9999'", StringComparison.Ordinal) || f.Text.Contains("9999 in", StringComparison.Ordinal));
    }

    [Fact]
    public void TheCleanFileHoldsWhatItsLinesSay()
    {
        var table = Read("ottermoor-season-4.csv");
        string[] lines = File.ReadAllLines(Path.Combine(Folder(), "ottermoor-season-4.csv"));
        int above = lines.Length - table.Records;
        Assert.Equal(table.Reading.UnitRow ?? 1, above);
        for (int row = 0; row < table.Records; row++)
        {
            string line = lines[row + above];
            if (line.Contains('"', StringComparison.Ordinal))
                continue;
            string[] fields = line.Split(',');
            Assert.Equal(table.Columns.Count, fields.Length);
            for (int c = 0; c < fields.Length; c++)
                if (table.Columns[c] is NumberColumn numbers)
                    Assert.Equal(fields[c].Length == 0 ? double.NaN : double.Parse(fields[c], CultureInfo.InvariantCulture), numbers.Values[row]);
                else if (table.Columns[c] is CodedColumn coded)
                    Assert.Equal(fields[c].Length == 0 ? null : fields[c], coded.TextAt(row));
        }
    }

    [Fact]
    public void AnIndependentReaderSeesTheSameWorkbook()
    {
        var table = Read("ottermoor-season-4.xlsx");
        using var workbook = new XLWorkbook(Path.Combine(Folder(), "ottermoor-season-4.xlsx"));
        var sheet = workbook.Worksheet("Runs");
        int first = table.Reading.UnitRow!.Value + 1;
        var mass = table.Numbers("Test mass");
        for (int row = 0; row < table.Records; row += 7)
        {
            Assert.Equal(sheet.Cell(first + row, 1).GetString(), table.Texts("Run")[row]);
            Assert.Equal(double.Parse(sheet.Cell(first + row, 14).GetString().Replace(',', '.'), CultureInfo.InvariantCulture), mass[row]);
        }
    }

    [Fact]
    public void TheWindows1252BatchKeepsItsLetters()
    {
        var table = Read("lisbraten-winter-batch.csv");
        Assert.Equal(("windows-1252", ';', ','), (table.Reading.Encoding, table.Reading.Delimiter!.Value, table.Reading.DecimalMark));
        Assert.Contains("Räder gewechselt", table.Texts("Remarks"));
        string[] lines = File.ReadAllLines(Path.Combine(Folder(), "lisbraten-winter-batch.csv"), Encoding.Latin1);
        int city = Array.IndexOf(lines[0].Split(';'), lines[0].Split(';').Single(n => n.StartsWith("City", StringComparison.Ordinal)));
        for (int row = 0; row < table.Records; row++)
        {
            string field = lines[row + (table.Reading.UnitRow ?? 1)].Split(';')[city];
            Assert.Equal(field.Length == 0 ? double.NaN : double.Parse(field.Replace(',', '.'), CultureInfo.InvariantCulture), ((NumberColumn)table.Columns[city]).Values[row]);
        }
    }
}
