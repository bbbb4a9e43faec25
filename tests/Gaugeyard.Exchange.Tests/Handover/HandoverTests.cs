using System.IO.Compression;
using System.Text;
using System.Text.Json;
using ClosedXML.Excel;
using CsCheck;
using Gaugeyard.Exchange.Handover;
using Gaugeyard.Records.Columns;
using Xunit;

namespace Gaugeyard.Exchange.Tests.Handover;

public class HandoverTests
{
    private static byte[] Workbook(HandoverContent content) => Made.Bytes(s => HandoverWorkbook.Write(s, content));

    private static byte[] Csv(HandoverContent content) => Made.Bytes(s => HandoverCsv.Write(s, content));

    private static void AssertSame(HandoverContent content, ImportedTable back, bool exactMarks, bool exactDefinitions)
    {
        Assert.Equal(content.Revision.Definitions.Select(d => d.Name), back.Columns.Select(c => c.Name));
        foreach (var definition in content.Revision.Definitions)
        {
            var was = content.Revision.Column(definition.Name);
            var now = back.Column(definition.Name);
            Assert.Equal(definition.Kind, now.Definition.Kind);
            if (exactDefinitions)
            {
                Assert.Equal((definition.Role, definition.Unit), (now.Definition.Role, now.Definition.Unit));
                Assert.Equal(definition.Levels, now.Definition.Levels);
                Assert.Equal(definition.MissingCodes, now.Definition.MissingCodes);
            }
            for (int row = 0; row < was.Count; row++)
            {
                if (was is NumberColumn numbers)
                    Assert.Equal(BitConverter.DoubleToInt64Bits(numbers.Values[row]), BitConverter.DoubleToInt64Bits(((NumberColumn)now).Values[row]));
                else
                    Assert.Equal(was.ValueAt(row), now.ValueAt(row));
            }
            var before = content.Revision.MarksOf(definition.Name);
            var after = back.Marks.GetValueOrDefault(definition.Name) ?? new Dictionary<int, CellMark>();
            if (exactMarks)
                Assert.Equal(before.OrderBy(m => m.Key), after.OrderBy(m => m.Key));
            else
                Assert.Equal(
                    before.Where(m => m.Value.State is CellState.Filled or CellState.Corrected or CellState.SetAside).OrderBy(m => m.Key).Select(m => (m.Key, m.Value.State, m.Value.Low, m.Value.High)),
                    after.Where(m => m.Value.State is not (CellState.Measured or CellState.Missing)).OrderBy(m => m.Key).Select(m => (m.Key, m.Value.State, m.Value.Low, m.Value.High)));
        }
        Assert.Equal(content.Revision.SetAside.OrderBy(s => s.Key), back.SetAside.OrderBy(s => s.Key));
    }

    [Fact]
    public void TheWorkbookReadsBackExactly()
    {
        var content = Made.Small();
        var back = Scratch.Read(Workbook(content), name: "back.xlsx");
        Assert.True(back.Reading.IsHandover);
        AssertSame(content, back, exactMarks: true, exactDefinitions: true);
    }

    [Fact]
    public void RandomTablesSurviveTheWorkbook() =>
        Gen.Select(Made.Columns, Gen.Int).Sample((made, seed) =>
        {
            var content = Made.WithMarks(made.Columns, made.Rows, seed);
            AssertSame(content, Scratch.Read(Workbook(content), name: "back.xlsx"), true, true);
        }, iter: 150, threads: 1);

    [Fact]
    public void RandomTablesSurviveTheCsv() =>
        Gen.Select(Made.Columns, Gen.Int).Sample((made, seed) =>
        {
            var content = Made.WithMarks(made.Columns, made.Rows, seed);
            var choices = new ReadChoices
            {
                HeaderRows = [1],
                UnitRow = 0,
                KeepSpellings = true,
                DateOrder = DateOrder.YearFirst,
                DecimalMark = '.',
                Delimiter = ',',
                Columns = [.. made.Columns.Select(c => new ColumnChoice(c.Name) { Kind = c.Definition.Kind == ColumnKind.Category ? ColumnKind.Text : c.Definition.Kind, Levels = c.Definition.Levels, Unit = c.Definition.Unit ?? "", MissingCodes = c is NumberColumn ? [] : null })],
            };
            // a category's texts are trimmed on the way in, so exactness is asked of text
            var asText = content with { Revision = Gaugeyard.Records.RunSets.RevisionContent.InMemory([.. made.Columns.Select(c => c.Definition.Kind == ColumnKind.Category ? c.With(c.Definition with { Kind = ColumnKind.Text }) : c)], content.Revision.Marks, content.Revision.SetAside) };
            AssertSame(asText, Scratch.Read(Csv(asText), choices, "back.csv"), false, false);
        }, iter: 200, threads: 1);

    [Fact]
    public void TheCsvBeginsWithItsHeaderAndKeepsItsStates()
    {
        var content = Made.Small();
        string text = Encoding.UTF8.GetString(Csv(content));
        Assert.StartsWith("run,vehicle,load,wet,start,city,city state,city low,city high,mass,mass state,remarks,record state,record reason\r\n", text, StringComparison.Ordinal);
        Assert.Contains("0.30000000000000004,filled,0.1,0.7000000000000001,", text, StringComparison.Ordinal);
        var back = Scratch.Read(Csv(content), name: "back.csv");
        Assert.Equal(8, back.Columns.Count);
        Assert.Equal(CellState.Filled, back.Marks["city"][2].State);
        Assert.Equal((0.1, 0.70000000000000007), (back.Marks["city"][2].Low!.Value, back.Marks["city"][2].High!.Value));
        Assert.Equal("=wrong tyres", back.SetAside[5]);
        Assert.Equal(content.Revision.Column("remarks").TextAt(0), back.Texts("remarks")[0]);
    }

    [Fact]
    public void NoTextOfAnyFormatCanBecomeAFormula()
    {
        var content = Made.Small();
        using (var archive = new ZipArchive(new MemoryStream(Workbook(content))))
            foreach (var entry in archive.Entries.Where(e => e.FullName.StartsWith("xl/worksheets/", StringComparison.Ordinal)))
            {
                using var reader = new StreamReader(entry.Open());
                string xml = reader.ReadToEnd();
                Assert.DoesNotContain("<f>", xml, StringComparison.Ordinal);
                Assert.DoesNotContain("<f ", xml, StringComparison.Ordinal);
                Assert.DoesNotContain(":f>", xml, StringComparison.Ordinal);
            }
        // no field of the CSV begins with a character that starts a formula, save numbers
        string csv = Encoding.UTF8.GetString(Csv(content));
        Assert.DoesNotContain(",=", csv, StringComparison.Ordinal);
        Assert.DoesNotContain("\"=", csv, StringComparison.Ordinal);
        Assert.DoesNotContain(",@", csv, StringComparison.Ordinal);
        Assert.DoesNotContain(",+", csv, StringComparison.Ordinal);
        Assert.Contains("\"'=HYPERLINK(\"\"x\"\")\"", csv, StringComparison.Ordinal);
    }

    [Fact]
    public void AnIndependentReaderSeesTheSameCells()
    {
        var content = Made.Small();
        using var workbook = new XLWorkbook(new MemoryStream(Workbook(content)));
        Assert.Equal(["Records", "Filled cells", "Cell states", "Columns", "Ledger", "Method and cautions"], workbook.Worksheets.Select(s => s.Name));
        var records = workbook.Worksheet("Records");
        Assert.Equal("city state", records.Cell(1, 8).GetString());
        Assert.Equal(["measured", "filled", "corrected", "missing", "measured"], Enumerable.Range(2, 5).Select(r => records.Cell(r, 8).GetString()));
        // this reader keeps 15 digits
        Assert.Equal(0.3, records.Cell(3, 7).GetDouble(), 1e-15);
        Assert.NotEqual(records.Cell(2, 7).Style.Fill.BackgroundColor, records.Cell(3, 7).Style.Fill.BackgroundColor);
        Assert.Equal(new DateTime(2031, 4, 7, 8, 10, 0), records.Cell(2, 6).GetDateTime());
        Assert.Equal("1871-05-01", records.Cell(3, 6).GetString());
        var filled = workbook.Worksheet("Filled cells");
        Assert.Equal((2.0, "R2", "city", 0.1), (filled.Cell(2, 1).GetDouble(), filled.Cell(2, 2).GetString(), filled.Cell(2, 3).GetString(), filled.Cell(2, 5).GetDouble()));
        Assert.True(filled.Cell(3, 1).IsEmpty());
        var columns = workbook.Worksheet("Columns");
        Assert.Equal(("city", "number", "reading", "L/100km"), (columns.Cell(7, 1).GetString(), columns.Cell(7, 2).GetString(), columns.Cell(7, 3).GetString(), columns.Cell(7, 4).GetString()));
        Assert.Equal((3.0, 1.0, 1.0), (columns.Cell(7, 7).GetDouble(), columns.Cell(7, 8).GetDouble(), columns.Cell(7, 9).GetDouble()));
        Assert.Equal("=fill", workbook.Worksheet("Ledger").Cell(3, 5).GetString());
        Assert.Contains(workbook.Worksheet("Method and cautions").RowsUsed(), r => r.Cell(2).GetString().StartsWith("Estimates are not measurements", StringComparison.Ordinal));
    }

    [Fact]
    public void AValueTypedOverAnEstimateIsMeasured()
    {
        var memory = new MemoryStream(Workbook(Made.Small()));
        using (var workbook = new XLWorkbook(memory))
        {
            workbook.Worksheet("Records").Cell(3, 7).SetValue(8.25);
            memory = new MemoryStream();
            workbook.SaveAs(memory);
        }
        var back = Scratch.Read(memory.ToArray(), name: "back.xlsx");
        Assert.Equal(8.25, back.Numbers("city")[1]);
        Assert.False(back.Marks["city"].ContainsKey(2));
        Assert.Contains(back.Findings, f => f is { Column: "city", Record: 2 });
    }

    [Fact]
    public void TheJsonHoldsEverything()
    {
        using var json = JsonDocument.Parse(Made.Bytes(s => HandoverJson.Write(s, Made.Small())));
        var root = json.RootElement;
        Assert.Equal(8, root.GetProperty("columns").GetArrayLength());
        var second = root.GetProperty("records")[1];
        Assert.Equal(0.1 + 0.2, second.GetProperty("values").GetProperty("city").GetDouble());
        Assert.Equal("filled", second.GetProperty("states").GetProperty("city").GetProperty("state").GetString());
        Assert.Equal(JsonValueKind.Null, root.GetProperty("records")[3].GetProperty("values").GetProperty("city").ValueKind);
        Assert.Equal("=wrong tyres", root.GetProperty("records")[4].GetProperty("setAside").GetString());
        Assert.Equal(2, root.GetProperty("ledger").GetArrayLength());
    }

    [Fact]
    public void LongTablesAreStreamedAndCancellable()
    {
        int rows = 30_000;
        var content = Made.Content([new NumberColumn(new("x", ColumnKind.Number), [.. Enumerable.Range(0, rows).Select(i => i / 7.0)])]);
        var back = Scratch.Read(Workbook(content), name: "back.xlsx");
        Assert.Equal(rows, back.Records);
        Assert.Equal(123 / 7.0, back.Numbers("x")[123]);
        using var source = new CancellationTokenSource();
        source.Cancel();
        Assert.Throws<OperationCanceledException>(() => HandoverWorkbook.Write(new MemoryStream(), content, source.Token));
        Assert.Throws<OperationCanceledException>(() => HandoverCsv.Write(new MemoryStream(), content, source.Token));
    }
}
