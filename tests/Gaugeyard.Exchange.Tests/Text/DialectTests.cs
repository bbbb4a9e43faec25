using System.Text;
using Gaugeyard.Records.Columns;
using Xunit;

namespace Gaugeyard.Exchange.Tests.Text;

public class DialectTests
{
    private static readonly string[][] Table =
    [
        ["run", "vehicle", "class", "city"],
        ["R1", "V1", "van", "9.1"],
        ["R2", "V1", "van", "9.3"],
        ["R3", "V2", "car, small", "6.2"],
        ["R4", "V3", "car \"S\"", ""],
    ];

    private static string Write(char delimiter, string end, bool comma) => string.Concat(Table.Select(row => string.Join(delimiter, row.Select((f, i) =>
    {
        string field = comma && i == 3 ? f.Replace('.', ',') : f;
        return field.IndexOfAny([delimiter, '"', ',', '\n']) >= 0 ? "\"" + field.Replace("\"", "\"\"") + "\"" : field;
    })) + end));

    public static TheoryData<char, string, bool, string> Dialects()
    {
        var data = new TheoryData<char, string, bool, string>();
        foreach (char delimiter in ",;\t|")
            foreach (string end in new[] { "\n", "\r\n", "\r" })
                foreach (bool comma in new[] { false, true })
                    foreach (string encoding in new[] { "utf-8", "utf-8-bom", "utf-16", "utf-16be", "utf-16-bom", "windows-1252" })
                        data.Add(delimiter, end, comma, encoding);
        return data;
    }

    [Theory]
    [MemberData(nameof(Dialects))]
    public void EveryDialectGivesTheSameTable(char delimiter, string end, bool comma, string encoding)
    {
        byte[] bytes = Encode(Write(delimiter, end, comma), encoding);
        var table = Scratch.Read(bytes);
        Assert.Equal(4, table.Records);
        Assert.Equal(delimiter, table.Reading.Delimiter);
        Assert.Equal(["R1", "R2", "R3", "R4"], table.Texts("run"));
        Assert.Equal(["van", "van", "car, small", "car \"S\""], table.Texts("class"));
        Assert.Equal([9.1, 9.3, 6.2, double.NaN], table.Numbers("city"));
        Assert.Equal(ColumnRole.RunName, table.Column("run").Definition.Role);
        Assert.Equal(ColumnRole.Vehicle, table.Column("vehicle").Definition.Role);
        Assert.Equal(ColumnRole.Reading, table.Column("city").Definition.Role);
    }

    [Fact]
    public void ALongFileInManySegmentsIsTheSameAsItsLines()
    {
        // several segments, with quoted line ends and stray quotes on the way, some of them at the cuts
        var text = new StringBuilder("run,vehicle,city,remarks\n");
        int line = 2;
        var lines = new List<int>();
        const int Rows = 150_000;
        for (int i = 0; i < Rows; i++)
        {
            lines.Add(line);
            text.Append('R').Append(i).Append(",V").Append(i % 977).Append(',').Append(i % 1000 == 7 ? "7.4x" : (i % 300 / 10.0).ToString("R")).Append(',');
            if (i % 501 == 0)
                text.Append("\"first, \"\"quoted\"\"\nsecond\"");
            else if (i > Rows / 2 && i % 90_001 == 0)
                text.Append("17\" wheels");
            else
                text.Append("none to speak of in this run");
            text.Append(i % 3 == 0 ? "\r\n" : "\n");
            line += i % 501 == 0 ? 2 : 1;
        }
        var table = Scratch.Read(text.ToString());
        Assert.Equal(Rows, table.Records);
        var city = table.Numbers("city");
        var vehicle = (CodedColumn)table.Column("vehicle");
        var remarks = (CodedColumn)table.Column("remarks");
        for (int i = 0; i < Rows; i++)
        {
            Assert.Equal(i % 1000 == 7 ? double.NaN : i % 300 / 10.0, city[i]);
            Assert.Equal(i % 977, vehicle.Codes[i]);
            if (i % 501 == 0)
                Assert.Equal("first, \"quoted\"\nsecond", remarks.TextAt(i));
        }
        Assert.Equal(Rows / 1000, table.Marks["city"].Count);
        Assert.Equal("17\" wheels", remarks.TextAt(90_001));
        Assert.Contains(table.Findings, f => f.Record == 3008 && f.Text.StartsWith($"row {lines[3007]}, column city", StringComparison.Ordinal));
    }

    private static byte[] Encode(string text, string encoding) => encoding switch
    {
        "utf-8" => new UTF8Encoding(false).GetBytes(text),
        "utf-8-bom" => [0xEF, 0xBB, 0xBF, .. Encoding.UTF8.GetBytes(text)],
        "utf-16" => Encoding.Unicode.GetBytes(text),
        "utf-16be" => Encoding.BigEndianUnicode.GetBytes(text),
        "utf-16-bom" => [0xFF, 0xFE, .. Encoding.Unicode.GetBytes(text)],
        _ => Encoding.Latin1.GetBytes(text),
    };
}
