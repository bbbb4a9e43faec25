using System.IO.Compression;
using System.Text;
using Gaugeyard.Exchange.Tests.Text;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Exchange.Tests.Spreadsheets;

public class WorkbookTests
{
    [Fact]
    public void EverySortOfCell()
    {
        byte[] book = Sheet.Book(("Runs", Sheet.Rows(
            ["run", "city", "wet", "start", "mass"],
            ["R1", 8.1, true, new DateTime(2031, 4, 7, 8, 10, 0), "1.540,5"],
            ["R2", "#DIV/0!", false, new DateTime(2031, 4, 8), "1.610,0"],
            ["R3", "f:8.25", true, null, "990,25"],
            ["R4", 0.1 + 0.2, null, "2031-04-09", 1000.5])));
        var table = Scratch.Read(book, name: "runs.xlsx");
        Assert.True(table.Reading.IsWorkbook);
        Assert.Equal([8.1, double.NaN, 8.25, 0.1 + 0.2], table.Numbers("city"));
        Assert.Equal(["yes", "no", "yes", null], table.Texts("wet"));
        Assert.Equal(["2031-04-07T08:10:00", "2031-04-08", null, "2031-04-09"], table.Texts("start"));
        Assert.Equal([1540.5, 1610, 990.25, 1000.5], table.Numbers("mass"));
    }

    [Fact]
    public void FormulasWithoutAResultAreCalculatedWithAFinding()
    {
        string rows = Sheet.Rows(["run", "fuel", "distance", "city"], ["R1", 8.0, 100], ["R2", 9.0, 120], ["R3", 7.5, 90])
            .Replace("<c r=\"C2\"><v>100</v></c>", "<c r=\"C2\"><v>100</v></c><c r=\"D2\"><f>100*B2/C2</f></c>", StringComparison.Ordinal)
            .Replace("<c r=\"C3\"><v>120</v></c>", "<c r=\"C3\"><v>120</v></c><c r=\"D3\"><f>100*B3/C3</f><v>7.5</v></c>", StringComparison.Ordinal)
            .Replace("<c r=\"C4\"><v>90</v></c>", "<c r=\"C4\"><v>90</v></c><c r=\"D4\"><f>ROUND(B4/0,1)</f></c>", StringComparison.Ordinal);
        var table = Scratch.Read(Sheet.Book(("Runs", rows)), name: "b.xlsx");
        Assert.Equal([8, 7.5, double.NaN], table.Numbers("city"));
        Assert.Contains(table.Findings, f => f.Text.Contains("calculated while reading", StringComparison.Ordinal));
        Assert.Contains(table.Findings, f => f.Text.Contains("could not be calculated", StringComparison.Ordinal));
    }

    [Fact]
    public void FormulasThatCouldRunAwayAreNotCalculated()
    {
        string rows = Sheet.Rows(["run", "city"], ["R1", 8.0], ["R2", 9.0]).Replace("</row>", "", StringComparison.Ordinal).Replace("<row r=\"2\">", "</row><row r=\"2\">", StringComparison.Ordinal)
            .Replace("<row r=\"3\">", "<c r=\"C2\"><f>REPT(B2,999999999)</f></c><c r=\"D2\"><f>B2*2</f></c></row><row r=\"3\">", StringComparison.Ordinal) + "</row>";
        var table = Scratch.Read(Sheet.Book(("Runs", rows)), name: "b.xlsx");
        Assert.Contains(table.Findings, f => f.Text.StartsWith("2 formulas", StringComparison.Ordinal) && f.Text.Contains("could not be calculated", StringComparison.Ordinal));
        const long Never = 1L << 40;
        Assert.Equal(90, Exchange.Spreadsheets.FormulaResults.RangeCells("SUM(A1:C30)/2"));
        Assert.Equal(0, Exchange.Spreadsheets.FormulaResults.RangeCells("100*$B$2/C2"));
        foreach (string formula in new[] { "SUM(A:A)", "SUM(1:9)", "A1&A1", "\"x\"", "INDIRECT(A1)", "OFFSET(A1,1,1)", new string('(', 2000) })
            Assert.True(Exchange.Spreadsheets.FormulaResults.RangeCells(formula) > Never, formula);
    }

    [Fact]
    public void The1904System()
    {
        string rows = Sheet.Rows(["run", "start", "date"], ["R1", new DateTime(2031, 4, 7), 46483], ["R2", new DateTime(2031, 4, 8), 46484]);
        var table = Scratch.Read(Sheet.Book(true, "", ("Runs", rows)), name: "runs.xlsx");
        // the same serial day is 1,462 days later when counted from 1904
        Assert.Equal(["2035-04-08", "2035-04-09"], table.Texts("start"));
        Assert.Equal(["2031-04-07", "2031-04-08"], table.Texts("date"));
    }

    [Fact]
    public void MergedHeadersPreambleAndUnits()
    {
        string rows = Sheet.Rows(
            ["Ottermoor, season 4"],
            ["Run", "Vehicle", "Consumption", null, "Tyres", null],
            [null, null, "City", "Highway", "Pressure", "Type"],
            [null, null, "[L/100 km]", "[L/100 km]", "[kPa]", null],
            ["R1", "V1", 8.1, 6.0, 230, "Winter"],
            ["R2", "V1", 8.3, 6.1, 229, "Winter"],
            ["R3", "V2", 9.3, 7.1, 240, "Summer"],
            ["Total", null, 25.7, 19.2, null, null]);
        var table = Scratch.Read(Sheet.Book(false, "<mergeCells count=\"4\"><mergeCell ref=\"A1:F1\"/><mergeCell ref=\"C2:D2\"/><mergeCell ref=\"E2:F2\"/><mergeCell ref=\"A2:A3\"/></mergeCells>", ("Runs", rows)), name: "runs.xlsx");
        Assert.Equal(["Run", "Vehicle", "Consumption City", "Consumption Highway", "Tyres Pressure", "Tyres Type"], table.Columns.Select(c => c.Name));
        Assert.Equal([null, null, "L/100km", "L/100km", "kPa", null], table.Columns.Select(c => c.Definition.Unit));
        Assert.Equal([2, 3], table.Reading.HeaderRows);
        Assert.Equal((4, 3), (table.Reading.UnitRow, table.Records));
        Assert.Equal([1, 8], table.Reading.LeftOut.Select(r => r.Row));
    }

    [Fact]
    public void SheetAndRangeCanBeChosen()
    {
        byte[] book = Sheet.Book(
            ("Notes", Sheet.Rows(["only a note"])),
            ("Runs", Sheet.Rows(["x", "y", "z"], [null, "run", "city"], [null, "R1", 8.1], [null, "R2", 8.2], [null, "R3", 8.3])),
            ("Other", Sheet.Rows(["run", "mass"], ["R1", 1500], ["R2", 1510])));
        Assert.Equal("Runs", Scratch.Read(book, name: "b.xlsx").Reading.Sheet);
        Assert.Equal([1500, 1510], Scratch.Read(book, new ReadChoices { Sheet = "Other" }, "b.xlsx").Numbers("mass"));
        var range = Scratch.Read(book, new ReadChoices { Sheet = "Runs", Range = "B2:C4" }, "b.xlsx");
        Assert.Equal(["R1", "R2"], range.Texts("run"));
        Assert.Contains("'None'", Scratch.Refused(book, "b.xlsx", choices: new ReadChoices { Sheet = "None" }), StringComparison.Ordinal);
        Assert.Contains("B3:W2019", Scratch.Refused(book, "b.xlsx", choices: new ReadChoices { Range = "nonsense" }), StringComparison.Ordinal);
    }

    [Fact]
    public void HiddenRowsAreReadWithAFinding()
    {
        string rows = Sheet.Rows(["run", "city"], ["R1", 8.1], ["R2", 8.2]).Replace("<row r=\"3\">", "<row r=\"3\" hidden=\"1\">", StringComparison.Ordinal);
        var table = Scratch.Read(Sheet.Book(("Runs", rows)), name: "b.xlsx");
        Assert.Equal(2, table.Records);
        Assert.Contains(table.Findings, f => f.Severity == Severity.Warning && f.Text.Contains("hides 1 row", StringComparison.Ordinal));
    }

    [Fact]
    public void EmptySheetsAndHeaderOnly()
    {
        Assert.Contains("no cell", Scratch.Refused(Sheet.Book(("Runs", "")), "b.xlsx"), StringComparison.Ordinal);
        Assert.Contains("no record", Scratch.Refused(Sheet.Book(("Runs", Sheet.Rows(["run", "city"]))), "b.xlsx"), StringComparison.Ordinal);
    }

    [Fact]
    public void AWorkbookUnderAnotherNameIsRead()
    {
        var table = Scratch.Read(Sheet.Book(("Runs", Sheet.Rows(["run", "city"], ["R1", 8.1]))), name: "runs.csv");
        Assert.Equal([8.1], table.Numbers("city"));
        Assert.Contains(table.Findings, f => f.Text.Contains("is a workbook", StringComparison.Ordinal));
    }

    [Fact]
    public void TruncatedWorkbooksAreRefused()
    {
        byte[] book = Sheet.Book(("Runs", Sheet.Rows(["run", "city"], ["R1", 8.1], ["R2", 8.2])));
        foreach (double share in new[] { 0.1, 0.5, 0.9, 0.99 })
            Assert.Contains("damaged", Scratch.Refused(book[..(int)(book.Length * share)], "b.xlsx"), StringComparison.Ordinal);
        Assert.Contains("damaged", Scratch.Refused(BadInputTests.Zip(("xl/workbook.xml", "<workbook"u8.ToArray())), "b.xlsx"), StringComparison.Ordinal);
        Assert.Contains(".xlsb", Scratch.Refused(BadInputTests.Zip(("xl/workbook.bin", [1])), "b.xlsb"), StringComparison.Ordinal);
        Assert.Contains("not an .xlsx", Scratch.Refused(BadInputTests.Zip(("mimetype", "x"u8.ToArray()), ("content.xml", "y"u8.ToArray())), "b.ods"), StringComparison.Ordinal);
    }

    [Fact]
    public void AWorkbookThatInflatesPastTheLimitIsStoppedWhileInflating()
    {
        using var memory = new MemoryStream();
        using (var archive = new ZipArchive(memory, ZipArchiveMode.Create, leaveOpen: true))
        {
            foreach (var entry in new ZipArchive(new MemoryStream(Sheet.Book(("Runs", "")))).Entries.Where(e => !e.FullName.Contains("worksheets", StringComparison.Ordinal)))
            {
                using var to = archive.CreateEntry(entry.FullName).Open();
                using var from = entry.Open();
                from.CopyTo(to);
            }
            using var sheet = archive.CreateEntry("xl/worksheets/sheet1.xml", CompressionLevel.Fastest).Open();
            byte[] blanks = Encoding.ASCII.GetBytes(new string(' ', 1 << 20));
            for (int i = 0; i < 200; i++)
                sheet.Write(blanks);
        }
        string message = Scratch.Refused(memory.ToArray(), "bomb.xlsx", new ReadLimits { InflatedWorkbookBytes = 32 << 20 });
        Assert.Contains("inflates to more than 32 MB", message, StringComparison.Ordinal);
    }

    [Fact]
    public void CellsFarOutCostNothing()
    {
        string rows = Sheet.Rows(["run", "city"], ["R1", 8.1]) + "<row r=\"1048576\"><c r=\"XFD1048576\"/></row>";
        Assert.Equal(1, Scratch.Read(Sheet.Book(("Runs", rows)), name: "b.xlsx").Records);
    }

    [Fact]
    public void NumbersTypedAsTextKeepTheirNames()
    {
        var table = Scratch.Read(Sheet.Book(("Runs", Sheet.Rows(["vehicle", "city"], ["007", 8.1], ["012", 8.2], ["007", 8.3]))), name: "b.xlsx");
        Assert.Equal(["007", "012", "007"], table.Texts("vehicle"));
        Assert.Equal(ColumnRole.Vehicle, table.Column("vehicle").Definition.Role);
    }
}
