using System.Globalization;
using System.IO.Compression;
using System.Security;
using System.Text;

namespace Gaugeyard.DemoSeason;

/// <summary>
/// The season as the track office hands it out: lines above the table, names over two rows with merged cells, a unit row,
/// decimal commas typed as text, several ways to say "nothing", footnote marks, a total and a footnote below. Written part
/// by part with fixed times, so that the contents are the same each time.
/// </summary>
internal static class MessyWorkbook
{
    private static readonly DateTimeOffset Written = new(2031, 12, 2, 9, 0, 0, TimeSpan.Zero);

    public static byte[] Write(IReadOnlyList<Run> runs, Dice dice)
    {
        using var bytes = new MemoryStream();
        using (var zip = new ZipArchive(bytes, ZipArchiveMode.Create, leaveOpen: true))
        {
            Part(zip, "[Content_Types].xml", """<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/xml"/><Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/><Override PartName="/xl/worksheets/sheet2.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/><Override PartName="/xl/styles.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml"/></Types>""");
            Part(zip, "_rels/.rels", """<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/officeDocument" Target="xl/workbook.xml"/></Relationships>""");
            Part(zip, "xl/workbook.xml", """<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"><sheets><sheet name="Runs" sheetId="1" r:id="rId1"/><sheet name="Office notes" sheetId="2" r:id="rId2"/></sheets></workbook>""");
            Part(zip, "xl/_rels/workbook.xml.rels", """<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="rId2" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet" Target="worksheets/sheet2.xml"/><Relationship Id="rId3" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles" Target="styles.xml"/></Relationships>""");
            Part(zip, "xl/styles.xml", """<styleSheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><numFmts count="1"><numFmt numFmtId="164" formatCode="dd\.mm\.yyyy\ hh:mm"/></numFmts><fonts count="2"><font><sz val="11"/><name val="Calibri"/></font><font><b/><sz val="11"/><name val="Calibri"/></font></fonts><fills count="2"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill></fills><borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders><cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs><cellXfs count="3"><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/><xf numFmtId="0" fontId="1" fillId="0" borderId="0" xfId="0" applyFont="1"/><xf numFmtId="164" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/></cellXfs><cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles></styleSheet>""");
            Part(zip, "xl/worksheets/sheet1.xml", RunsSheet(runs, dice));
            Part(zip, "xl/worksheets/sheet2.xml", NotesSheet());
        }
        return bytes.ToArray();
    }

    private static void Part(ZipArchive zip, string name, string xml)
    {
        var entry = zip.CreateEntry(name, CompressionLevel.Optimal);
        entry.LastWriteTime = Written;
        using var stream = entry.Open();
        stream.Write(Encoding.UTF8.GetBytes("""<?xml version="1.0" encoding="UTF-8" standalone="yes"?>""" + "\n" + xml));
    }

    private static string RunsSheet(IReadOnlyList<Run> runs, Dice dice)
    {
        var columns = Column.All;
        var merged = new List<string>();
        var sheet = new StringBuilder("""<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><cols><col min="1" max="24" width="15" customWidth="1"/></cols><sheetData>""");
        Row(1, [Text(1, 0, "Ottermoor proving ground, season 4: run log", 1)]);
        merged.Add("A1:H1");
        Row(2, [Text(2, 0, "Exported 2.12.2031 by the track office. Battery vehicles: litres of petrol of the same energy, 8.9 kWh = 1 L. 9999, n/a and - mean: not measured.")]);
        merged.Add("A2:P2");
        // "Tyre type" and "Tyre pressure" stand under one merged "Tyre"; every other name is merged over both rows
        var upper = new List<string>();
        var lower = new List<string>();
        for (int c = 0; c < columns.Count; c++)
        {
            if (columns[c].Name.StartsWith("Tyre ", StringComparison.Ordinal))
            {
                if (!columns[c - 1].Name.StartsWith("Tyre ", StringComparison.Ordinal))
                {
                    upper.Add(Text(4, c, "Tyre", 1));
                    merged.Add($"{Letters(c)}4:{Letters(c + 1)}4");
                }
                lower.Add(Text(5, c, columns[c].Name["Tyre ".Length..], 1));
            }
            else
            {
                upper.Add(Text(4, c, columns[c].Name, 1));
                merged.Add($"{Letters(c)}4:{Letters(c)}5");
            }
        }
        Row(4, upper);
        Row(5, lower);
        Row(6, columns.Select((c, i) => c.Unit.Length > 0 ? Text(6, i, c.Unit) : ""));
        int row = 7;
        foreach (var run in runs)
        {
            int at = row++;
            Row(at, columns.Select((c, i) => Cell(at, i, c, run, dice)));
        }
        Row(row, columns.Select((c, i) => c.Name switch
        {
            Column.Run => Text(row, i, "Total", 1),
            "Distance" => Number(row, i, Math.Round(runs.Sum(r => r.Distance), 1)),
            Column.Fuel => Number(row, i, Math.Round(runs.Where(r => !r.Lost.Contains(Column.Fuel)).Sum(r => r.Fuel), 2)),
            _ => "",
        }));
        Row(row + 1, [Text(row + 1, 0, "* read by hand from the display, the logger had stopped")]);
        sheet.Append("</sheetData><mergeCells count=\"").Append(merged.Count).Append("\">");
        foreach (string range in merged)
            sheet.Append("<mergeCell ref=\"").Append(range).Append("\"/>");
        return sheet.Append("</mergeCells></worksheet>").ToString();

        void Row(int number, IEnumerable<string> cells)
        {
            sheet.Append("<row r=\"").Append(number).Append("\">");
            foreach (string cell in cells)
                sheet.Append(cell);
            sheet.Append("</row>");
        }
    }

    private static string Cell(int row, int column, Column kind, Run run, Dice dice)
    {
        object? value = kind.Written(run);
        if (value is null)
            return kind.IsNumber ? dice.Weighted([0.35, 0.25, 0.2, 0.2]) switch
            {
                0 => "",
                1 => Text(row, column, "n/a"),
                // an odometer may well stand at 9999
                2 => kind.Name == Column.Odometer ? Text(row, column, "n/a") : Number(row, column, 9999),
                _ => Text(row, column, "-"),
            } : Text(row, column, "n/a");
        if (value is DateTime at)
            return $"<c r=\"{Letters(column)}{row}\" s=\"2\"><v>{Math.Round(at.ToOADate(), 9).ToString("R", CultureInfo.InvariantCulture)}</v></c>";
        if (value is double number)
        {
            // whole numbers were keyed in as numbers; whatever has a comma was pasted from the meter's screen as text
            if (kind.Format == "0" && number == Math.Round(number))
                return Number(row, column, number);
            string text = kind.NumberText(run, number).Replace('.', ',');
            bool byHand = kind.Name is Column.City or Column.Highway && !run.Miswritten.ContainsKey(kind.Name) && dice.Chance(0.004);
            return Text(row, column, byHand ? text + "*" : text);
        }
        string words = (string)value;
        if (words.Length == 0)
            return "";
        // hands leave blanks behind
        return Text(row, column, kind.Name is "Route" or "Class" && dice.Chance(0.02) ? words + " " : words);
    }

    private static string NotesSheet() =>
        """<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>Gate keys: ask at the office. The fen loop is closed when the siren sounds.</t></is></c></row><row r="2"><c r="A2" t="inlineStr"><is><t>Run sheets 1 to 40 are in the blue folder.</t></is></c></row></sheetData></worksheet>""";

    private static string Text(int row, int column, string text, int style = 0) =>
        $"<c r=\"{Letters(column)}{row}\"{(style > 0 ? $" s=\"{style}\"" : "")} t=\"inlineStr\"><is><t xml:space=\"preserve\">{SecurityElement.Escape(text)}</t></is></c>";

    private static string Number(int row, int column, double number) =>
        $"<c r=\"{Letters(column)}{row}\"><v>{number.ToString("R", CultureInfo.InvariantCulture)}</v></c>";

    private static string Letters(int column) => column < 26 ? $"{(char)('A' + column)}" : $"{(char)('A' + column / 26 - 1)}{(char)('A' + column % 26)}";
}
