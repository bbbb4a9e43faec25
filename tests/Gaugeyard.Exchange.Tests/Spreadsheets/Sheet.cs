using System.Globalization;
using System.Security;
using System.Text;
using Gaugeyard.Exchange.Tests.Text;

namespace Gaugeyard.Exchange.Tests.Spreadsheets;

/// <summary>Builds workbooks from bare XML, so that a test decides about every cell.</summary>
internal static class Sheet
{
    private const string Main = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";

    public static string Rows(params object?[][] rows) => string.Concat(rows.Select((row, r) => $"<row r=\"{r + 1}\">{string.Concat(row.Select((value, c) => Cell(value, r, c)))}</row>"));

    public static string Cell(object? value, int row, int column)
    {
        string at = $"{(char)('A' + column)}{row + 1}";
        return value switch
        {
            null => "",
            double d => $"<c r=\"{at}\"><v>{d.ToString("R", CultureInfo.InvariantCulture)}</v></c>",
            int i => $"<c r=\"{at}\"><v>{i}</v></c>",
            bool b => $"<c r=\"{at}\" t=\"b\"><v>{(b ? 1 : 0)}</v></c>",
            DateTime d => $"<c r=\"{at}\" s=\"1\"><v>{d.ToOADate().ToString("R", CultureInfo.InvariantCulture)}</v></c>",
            string s when s.StartsWith('#') => $"<c r=\"{at}\" t=\"e\"><v>{s}</v></c>",
            string s when s.StartsWith("f:", StringComparison.Ordinal) => $"<c r=\"{at}\"><f>1+1</f><v>{s[2..]}</v></c>",
            string s => $"<c r=\"{at}\" t=\"inlineStr\"><is><t xml:space=\"preserve\">{SecurityElement.Escape(s)}</t></is></c>",
            _ => throw new ArgumentException(value.GetType().Name),
        };
    }

    public static byte[] Book(params (string Name, string Rows)[] sheets) => Book(false, "", sheets);

    public static byte[] Book(bool from1904, string afterRows, params (string Name, string Rows)[] sheets)
    {
        var parts = new List<(string, byte[])>
        {
            ("[Content_Types].xml", Utf8($"<Types xmlns=\"http://schemas.openxmlformats.org/package/2006/content-types\"><Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/><Default Extension=\"xml\" ContentType=\"application/xml\"/><Override PartName=\"/xl/workbook.xml\" ContentType=\"application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml\"/><Override PartName=\"/xl/styles.xml\" ContentType=\"application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml\"/>{string.Concat(sheets.Select((_, i) => $"<Override PartName=\"/xl/worksheets/sheet{i + 1}.xml\" ContentType=\"application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml\"/>"))}</Types>")),
            ("_rels/.rels", Utf8("<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\"><Relationship Id=\"rId1\" Type=\"http://schemas.openxmlformats.org/officeDocument/2006/relationships/officeDocument\" Target=\"xl/workbook.xml\"/></Relationships>")),
            ("xl/workbook.xml", Utf8($"<workbook xmlns=\"{Main}\" xmlns:r=\"http://schemas.openxmlformats.org/officeDocument/2006/relationships\"><workbookPr{(from1904 ? " date1904=\"1\"" : "")}/><sheets>{string.Concat(sheets.Select((s, i) => $"<sheet name=\"{s.Name}\" sheetId=\"{i + 1}\" r:id=\"rId{i + 1}\"/>"))}</sheets></workbook>")),
            ("xl/_rels/workbook.xml.rels", Utf8($"<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\">{string.Concat(sheets.Select((_, i) => $"<Relationship Id=\"rId{i + 1}\" Type=\"http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet\" Target=\"worksheets/sheet{i + 1}.xml\"/>"))}<Relationship Id=\"rId99\" Type=\"http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles\" Target=\"styles.xml\"/></Relationships>")),
            ("xl/styles.xml", Utf8($"<styleSheet xmlns=\"{Main}\"><fonts count=\"1\"><font/></fonts><fills count=\"1\"><fill/></fills><borders count=\"1\"><border/></borders><cellStyleXfs count=\"1\"><xf/></cellStyleXfs><cellXfs count=\"2\"><xf numFmtId=\"0\"/><xf numFmtId=\"22\" applyNumberFormat=\"1\"/></cellXfs></styleSheet>")),
        };
        parts.AddRange(sheets.Select((s, i) => ($"xl/worksheets/sheet{i + 1}.xml", Utf8($"<worksheet xmlns=\"{Main}\"><sheetData>{s.Rows}</sheetData>{afterRows}</worksheet>"))));
        return BadInputTests.Zip([.. parts]);
    }

    private static byte[] Utf8(string text) => Encoding.UTF8.GetBytes(text);
}
