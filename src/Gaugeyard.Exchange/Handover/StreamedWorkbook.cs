using System.Buffers.Text;
using System.Globalization;
using System.IO.Compression;
using System.Security;
using System.Text;

namespace Gaugeyard.Exchange.Handover;

/// <summary>
/// Writes the XML of a workbook straight into the archive, sheet by sheet and row by row, in bounded memory for tables of any
/// length. Text is always text: no cell ever becomes a formula. The usual spreadsheet library was tried and given up for
/// this: it writes numbers with 15 digits, and a hand-over must give back every bit.
/// </summary>
internal sealed class StreamedWorkbook(Stream target) : IDisposable
{
    private readonly ZipArchive _archive = new(target, ZipArchiveMode.Create, leaveOpen: true);
    private readonly List<string> _sheets = [];
    private readonly byte[] _buffer = new byte[1 << 16];
    private Stream? _sheet;
    private int _used;
    private int _row;
    private int _column;

    /// <summary>Begins the next sheet.</summary>
    /// <param name="name">Its name, at most 31 characters.</param>
    /// <param name="widths">Column widths in characters.</param>
    /// <param name="frozenColumns">Columns that stay in view beside the frozen heading row.</param>
    public void BeginSheet(string name, IReadOnlyList<double> widths, int frozenColumns = 0)
    {
        EndSheet();
        _sheets.Add(name);
        _sheet = _archive.CreateEntry($"xl/worksheets/sheet{_sheets.Count}.xml", CompressionLevel.Fastest).Open();
        _row = 0;
        Raw("""<?xml version="1.0" encoding="UTF-8" standalone="yes"?><worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetViews><sheetView workbookViewId="0">""");
        Raw($"""<pane {(frozenColumns > 0 ? $"xSplit=\"{frozenColumns}\" " : "")}ySplit="1" topLeftCell="{Address(frozenColumns)}2" activePane="{(frozenColumns > 0 ? "bottomRight" : "bottomLeft")}" state="frozen"/></sheetView></sheetViews>""");
        if (widths.Count > 0)
        {
            Raw("<cols>");
            for (int i = 0; i < widths.Count; i++)
                Raw($"""<col min="{i + 1}" max="{i + 1}" width="{widths[i].ToString("0.##", CultureInfo.InvariantCulture)}" customWidth="1"/>""");
            Raw("</cols>");
        }
        Raw("<sheetData>");
    }

    public void BeginRow()
    {
        EndRow();
        _row++;
        _column = 0;
        Raw("<row r=\"");
        Integer(_row);
        Raw("\">");
    }

    public void Blank(CellLook look = CellLook.Plain)
    {
        if (look != CellLook.Plain)
        {
            BeginCell(look);
            Raw("/>");
        }
        else
            _column++;
    }

    public void Number(double value, CellLook look = CellLook.Plain)
    {
        BeginCell(look);
        Raw("><v>");
        Ensure(40);
        Utf8Formatter.TryFormat(value, _buffer.AsSpan(_used), out int n);
        _used += n;
        Raw("</v></c>");
    }

    /// <summary>A date with its time; the caller has made sure that a sheet can hold it.</summary>
    public void Date(DateTime value, CellLook look = CellLook.Date) => Number(value.ToOADate(), look);

    public void Text(string value, CellLook look = CellLook.Plain)
    {
        BeginCell(look);
        Raw(" t=\"inlineStr\"><is><t xml:space=\"preserve\">");
        Escaped(value);
        Raw("</t></is></c>");
    }

    /// <summary>Completes the file.</summary>
    public void Finish()
    {
        EndSheet();
        Part("[Content_Types].xml", $"""<?xml version="1.0" encoding="UTF-8" standalone="yes"?><Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/xml"/><Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/><Override PartName="/xl/styles.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml"/>{string.Concat(_sheets.Select((_, i) => $"""<Override PartName="/xl/worksheets/sheet{i + 1}.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/>"""))}</Types>""");
        Part("_rels/.rels", """<?xml version="1.0" encoding="UTF-8" standalone="yes"?><Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/officeDocument" Target="xl/workbook.xml"/></Relationships>""");
        Part("xl/workbook.xml", $"""<?xml version="1.0" encoding="UTF-8" standalone="yes"?><workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"><sheets>{string.Concat(_sheets.Select((name, i) => $"""<sheet name="{SecurityElement.Escape(name)}" sheetId="{i + 1}" r:id="rId{i + 1}"/>"""))}</sheets></workbook>""");
        Part("xl/_rels/workbook.xml.rels", $"""<?xml version="1.0" encoding="UTF-8" standalone="yes"?><Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">{string.Concat(_sheets.Select((_, i) => $"""<Relationship Id="rId{i + 1}" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet" Target="worksheets/sheet{i + 1}.xml"/>"""))}<Relationship Id="rId{_sheets.Count + 1}" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles" Target="styles.xml"/></Relationships>""");
        Part("xl/styles.xml", Styles());
        _archive.Dispose();
    }

    public void Dispose() => _archive.Dispose();

    // one cell format per look, in the order of the looks
    private static string Styles()
    {
        static string Fill(string colour) => $"""<fill><patternFill patternType="solid"><fgColor rgb="FF{colour}"/><bgColor indexed="64"/></patternFill></fill>""";
        static string Format(int number, int font, int fill, string rest = "/>") => $"""<xf numFmtId="{number}" fontId="{font}" fillId="{fill}" borderId="0" xfId="0"{(number > 0 ? " applyNumberFormat=\"1\"" : "")}{(font > 0 ? " applyFont=\"1\"" : "")}{(fill > 0 ? " applyFill=\"1\"" : "")}{rest}""";
        return $"""<?xml version="1.0" encoding="UTF-8" standalone="yes"?><styleSheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><numFmts count="1"><numFmt numFmtId="164" formatCode="yyyy\-mm\-dd\ hh:mm:ss"/></numFmts><fonts count="2"><font><sz val="11"/><name val="Calibri"/></font><font><b/><sz val="11"/><name val="Calibri"/></font></fonts><fills count="5"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill>{Fill(Looks.FilledColour)}{Fill(Looks.CorrectedColour)}{Fill(Looks.SetAsideColour)}</fills><borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders><cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs><cellXfs count="10">{Format(0, 0, 0)}{Format(0, 1, 0)}{Format(164, 0, 0)}{Format(0, 0, 2)}{Format(0, 0, 3)}{Format(0, 0, 4)}{Format(164, 0, 2)}{Format(164, 0, 3)}{Format(164, 0, 4)}{Format(0, 0, 0, " applyAlignment=\"1\"><alignment vertical=\"top\" wrapText=\"1\"/></xf>")}</cellXfs><cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles></styleSheet>""";
    }

    private void Part(string name, string text)
    {
        using var part = _archive.CreateEntry(name, CompressionLevel.Fastest).Open();
        part.Write(Encoding.UTF8.GetBytes(text));
    }

    private void EndRow()
    {
        if (_row > 0)
            Raw("</row>");
    }

    private void EndSheet()
    {
        if (_sheet is null)
            return;
        EndRow();
        Raw("</sheetData></worksheet>");
        Flush();
        _sheet.Dispose();
        _sheet = null;
    }

    private void BeginCell(CellLook look)
    {
        Raw("<c r=\"");
        Column(_column++);
        Integer(_row);
        Raw("\"");
        if (look != CellLook.Plain)
        {
            Raw(" s=\"");
            Integer((int)look);
            Raw("\"");
        }
    }

    private static string Address(int column)
    {
        string name = "";
        for (int i = column; i >= 0; i = i / 26 - 1)
            name = (char)('A' + i % 26) + name;
        return name;
    }

    private void Column(int column)
    {
        if (column < 26)
        {
            Ensure(1);
            _buffer[_used++] = (byte)('A' + column);
        }
        else
            Raw(Address(column));
    }

    private void Integer(int value)
    {
        Ensure(12);
        Utf8Formatter.TryFormat(value, _buffer.AsSpan(_used), out int n);
        _used += n;
    }

    // ASCII of our own
    private void Raw(string text)
    {
        for (int at = 0; at < text.Length;)
        {
            Ensure(1);
            int n = Math.Min(text.Length - at, _buffer.Length - _used);
            Encoding.ASCII.GetBytes(text.AsSpan(at, n), _buffer.AsSpan(_used));
            _used += n;
            at += n;
        }
    }

    private void Escaped(string text)
    {
        foreach (string piece in CellText.Pieces(text))
        {
            Ensure(Encoding.UTF8.GetMaxByteCount(piece.Length));
            _used += Encoding.UTF8.GetBytes(piece, _buffer.AsSpan(_used));
        }
    }

    private void Ensure(int bytes)
    {
        if (_buffer.Length - _used < bytes)
            Flush();
    }

    private void Flush()
    {
        _sheet!.Write(_buffer, 0, _used);
        _used = 0;
    }
}

/// <summary>Colours of the looks, told apart by colour-blind readers too.</summary>
internal static class Looks
{
    public const string FilledColour = "FBE3C0", CorrectedColour = "D6E6F2", SetAsideColour = "E4E4E4";
}

/// <summary>Text as the XML of a sheet can hold it.</summary>
internal static class CellText
{
    /// <summary>The text's XML in pieces of at most a few thousand characters, characters that XML cannot hold as _xHHHH_.</summary>
    public static IEnumerable<string> Pieces(string text)
    {
        var piece = new StringBuilder();
        for (int i = 0; i < text.Length; i++)
        {
            char c = text[i];
            switch (c)
            {
                case '&':
                    piece.Append("&amp;");
                    break;
                case '<':
                    piece.Append("&lt;");
                    break;
                case '>':
                    piece.Append("&gt;");
                    break;
                case '_' when LooksEscaped(text, i):
                    piece.Append("_x005F_");
                    break;
                case '\t' or '\n':
                    piece.Append(c);
                    break;
                case < ' ' or '\uFFFE' or '\uFFFF':
                    piece.Append($"_x{(int)c:X4}_");
                    break;
                default:
                    if (char.IsHighSurrogate(c) && i + 1 < text.Length && char.IsLowSurrogate(text[i + 1]))
                        piece.Append(c).Append(text[++i]);
                    else if (char.IsSurrogate(c))
                        piece.Append($"_x{(int)c:X4}_");
                    else
                        piece.Append(c);
                    break;
            }
            if (piece.Length > 4000)
            {
                yield return piece.ToString();
                piece.Clear();
            }
        }
        if (piece.Length > 0)
            yield return piece.ToString();
    }

    /// <summary>Whether the file format would take the text at a position for an escaped character.</summary>
    private static bool LooksEscaped(string text, int at) =>
        at + 6 < text.Length && text[at + 1] == 'x' && text[at + 6] == '_' && char.IsAsciiHexDigit(text[at + 2]) && char.IsAsciiHexDigit(text[at + 3]) && char.IsAsciiHexDigit(text[at + 4]) && char.IsAsciiHexDigit(text[at + 5]);
}
