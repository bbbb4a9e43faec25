using System.Globalization;
using ExcelDataReader;
using Gaugeyard.Exchange.Detection;
using Gaugeyard.Exchange.Text;

namespace Gaugeyard.Exchange.Spreadsheets;

/// <summary>A table in a sheet of an .xlsx workbook, read row by row.</summary>
internal sealed class WorkbookTable : ITableSource
{
    private const int HeadRows = 400;

    private readonly ArrivingFile _file;
    private readonly ReadLimits _limits;
    private readonly CellRange? _range;
    private readonly int _lastRow;
    private readonly int _lastColumn;

    static WorkbookTable() => System.Text.Encoding.RegisterProvider(System.Text.CodePagesEncodingProvider.Instance);

    public WorkbookTable(ArrivingFile file, ReadChoices choices, ReadLimits limits, CancellationToken cancellationToken)
    {
        _file = file;
        _limits = limits;
        _range = choices.Range is null ? null : CellRange.Parse(choices.Range, file.Name);
        using (var stream = file.Open())
        {
            var facts = WorkbookGate.Check(stream, file.Name, limits, cancellationToken);
            From1904 = facts.From1904;
            _lastRow = facts.LastRow;
            _lastColumn = facts.LastColumn;
            if (facts.BareFormulas > 0)
                Formulas = FormulaResults.Of(file, facts.BareFormulas, facts.Bytes, cancellationToken);
        }
        if (_range is null && _lastColumn >= limits.Columns)
            throw TooWide(_lastRow, _lastColumn + 1);
        using var reader = OpenReader();
        var names = new List<string>();
        var heads = new List<(string Name, bool Hidden, List<HeadRow> Rows, List<(int, int, int)> Merged)>();
        do
        {
            names.Add(reader.Name);
            if (choices.Sheet is null || reader.Name == choices.Sheet)
                heads.Add((reader.Name, reader.VisibleState != "visible", ReadHead(reader, cancellationToken), MergedOf(reader)));
        }
        while (reader.NextResult());
        Sheets = names;
        if (choices.Sheet is not null && heads.Count == 0)
            throw new UnreadableFileException($"{file.Name} has no sheet called '{choices.Sheet}'; it has {string.Join(", ", names.Select(n => $"'{n}'"))}.");
        var best = heads.Where(h => h.Rows.Count > 0).OrderBy(h => h.Hidden).ThenByDescending(h => IsTable(h.Rows)).FirstOrDefault();
        if (best.Rows is null)
            throw new UnreadableFileException($"{file.Name} holds no cell with a value{(choices.Sheet is null ? "" : $" in sheet '{choices.Sheet}'")}. Enter the runs or choose another file.");
        Sheet = best.Name;
        Head = best.Rows;
        Merged = best.Merged;
        UsualDecimalMark = DecimalMarks.Usual(_textHeads[best.Name]);
    }

    private readonly Dictionary<string, List<HeadRow>> _textHeads = new(StringComparer.Ordinal);

    public bool From1904 { get; }

    /// <summary>Results of formulas that the workbook stores without one; null when there are none.</summary>
    public FormulaResults? Formulas { get; }

    // rows are counted by the reading loops, since the reader does not tell them
    private int _row;

    private object? ValueAt(IExcelDataReader reader, int at) =>
        reader.GetValue(at) ?? (Formulas is not null && Formulas.TryGet(reader.Name, _row, at, out object result) ? result : null);

    public IReadOnlyList<string> Sheets { get; }

    public string Sheet { get; }

    public IReadOnlyList<HeadRow> Head { get; }

    public IReadOnlyList<(int Row, int From, int To)> Merged { get; }

    public char UsualDecimalMark { get; }

    /// <summary>Rows that the sheet hides; they are read like the others.</summary>
    public int HiddenRows { get; private set; }

    public string What => $"workbook, sheet '{Sheet}'{_file.Wrapping}";

    public void Dispose()
    {
    }

    public RawTable Read(ReadPlan plan, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken)
    {
        using var reader = OpenReader();
        while (reader.Name != Sheet)
            if (!reader.NextResult())
                throw new InvalidDataException("the sheet is gone");
        var layout = plan.Layout;
        int width = layout.Names.Length;
        var columns = Enumerable.Range(0, width).Select(c => new RawColumn(plan.Of(c).AsText, plan.Of(c).DecimalMark)).ToList();
        var rows = new RowMap();
        var repeats = new List<int>();
        (int First, int Count) ragged = default;
        bool ended = true;
        int number = 0, hidden = 0, total = Math.Max(1, Math.Min(reader.RowCount, _lastRow));
        while (number < _lastRow && reader.Read())
        {
            _row = ++number;
            if (number < layout.FirstDataRow || _range is { } range && number > range.LastRow)
                continue;
            if ((number & 1023) == 0)
            {
                cancellationToken.ThrowIfCancellationRequested();
                progress?.Report(Math.Min(1, (double)number / total));
            }
            int last = LastFilled(reader);
            if (last < layout.FirstColumn + Offset)
                continue;
            if (atMost is { } most && rows.Count >= most)
            {
                ended = false;
                break;
            }
            if (IsRepeat(reader, layout, last))
            {
                repeats.Add(number);
                continue;
            }
            rows.Add(number);
            if (reader.RowHeight == 0)
                hidden++;
            int n = last + 1 - layout.FirstColumn - Offset;
            if (n > columns.Count)
            {
                if (n > _limits.Columns)
                    throw TooWide(number, n);
                ragged = (ragged.Count == 0 ? number : ragged.First, ragged.Count + 1);
                while (columns.Count < n)
                {
                    var (asText, mark) = plan.Of(columns.Count);
                    columns.Add(new RawColumn(asText, mark));
                    columns[^1].PadTo(rows.Count - 1);
                }
            }
            for (int c = 0; c < columns.Count; c++)
            {
                int at = c + layout.FirstColumn + Offset;
                if (at <= last)
                    AddCell(columns[c], reader, at, number);
                else
                    columns[c].AddBlank();
            }
            if (rows.Count > _limits.Records || (long)rows.Count * columns.Count > _limits.Cells)
                throw new UnreadableFileException($"{_file.Name} has more than {_limits.Records:N0} records or {_limits.Cells:N0} cells, the limits for one file. Split it and upload the parts.");
        }
        HiddenRows = hidden;
        return new RawTable(columns, rows, ended, ended ? 1 : (double)number / total, repeats, ragged, default);
    }

    private int Offset => _range?.FirstColumn ?? 0;

    private IExcelDataReader OpenReader() => ExcelReaderFactory.CreateOpenXmlReader(_file.Open());

    private List<HeadRow> ReadHead(IExcelDataReader reader, CancellationToken cancellationToken)
    {
        var rows = new List<HeadRow>();
        var texts = new List<HeadRow>();
        int number = 0;
        while (rows.Count < HeadRows && number < _lastRow && reader.Read())
        {
            _row = ++number;
            if ((number & 1023) == 0)
                cancellationToken.ThrowIfCancellationRequested();
            if (_range is { } range && (number < range.FirstRow || number > range.LastRow))
                continue;
            int last = LastFilled(reader);
            if (last < Offset)
                continue;
            if (last + 1 - Offset > _limits.Columns)
                throw TooWide(number, last + 1 - Offset);
            var cells = new string[last + 1 - Offset];
            var written = new string[cells.Length];
            for (int c = 0; c < cells.Length; c++)
            {
                cells[c] = TextOf(reader, c + Offset);
                written[c] = ValueAt(reader, c + Offset) is string s ? s : "";
            }
            rows.Add(new HeadRow(number, cells));
            texts.Add(new HeadRow(number, written));
        }
        _textHeads[reader.Name] = texts;
        return rows;
    }

    private List<(int, int, int)> MergedOf(IExcelDataReader reader) =>
        [.. (reader.MergeCells ?? []).Where(m => m.FromRow < 5000).Select(m => (m.FromRow + 1, m.FromColumn - Offset, m.ToColumn - Offset))];

    private static bool IsTable(List<HeadRow> rows) => rows.Count >= 2 && rows.Max(r => r.Filled) >= 2;

    private int LastFilled(IExcelDataReader reader)
    {
        int last = Math.Min(Math.Min(reader.FieldCount - 1, _lastColumn), _range?.LastColumn ?? int.MaxValue);
        while (last >= 0 && ValueAt(reader, last) is null or "")
            last--;
        return last;
    }

    private bool IsRepeat(IExcelDataReader reader, Layout layout, int last)
    {
        if (layout.HeaderRows.Count != 1 || last + 1 - layout.FirstColumn - Offset < layout.Names.Length)
            return false;
        for (int c = 0; c < layout.Names.Length; c++)
            if (ValueAt(reader, c + layout.FirstColumn + Offset) is var value && (value is not string text ? layout.Names[c].Length > 0 || value is not null : Blanks.OneLine(text, 200) != layout.Names[c]))
                return false;
        return true;
    }

    private void AddCell(RawColumn column, IExcelDataReader reader, int at, int row)
    {
        switch (ValueAt(reader, at))
        {
            case double number:
                column.AddNumber(number);
                break;
            case int whole:
                column.AddNumber(whole);
                break;
            case string text:
                if (text.Length > _limits.CellCharacters)
                    throw new UnreadableFileException($"{_file.Name}, row {row} holds a cell of {text.Length:N0} characters; at most {_limits.CellCharacters:N0} are taken. Shorten the cell.");
                column.Add(text);
                break;
            default:
                column.Add(TextOf(reader, at));
                break;
        }
    }

    private string TextOf(IExcelDataReader reader, int at) => ValueAt(reader, at) switch
    {
        null => "",
        string text => text,
        double number => PlainNumber.Text(number),
        bool yes => yes ? "TRUE" : "FALSE",
        DateTime date => date.TimeOfDay == TimeSpan.Zero
            ? date.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture)
            : date.ToString(date.Ticks % TimeSpan.TicksPerSecond == 0 ? "yyyy-MM-dd'T'HH:mm:ss" : "yyyy-MM-dd'T'HH:mm:ss.fffffff", CultureInfo.InvariantCulture),
        TimeSpan span => span.ToString("c", CultureInfo.InvariantCulture),
        IFormattable other => other.ToString(null, CultureInfo.InvariantCulture),
        var other => other.ToString() ?? "",
    };

    private UnreadableFileException TooWide(int row, int columns) =>
        new($"{_file.Name}, row {row} has {columns:N0} columns; at most {_limits.Columns:N0} are taken. Leave out columns that are not needed, or choose a range.");
}

/// <summary>A range such as "B3:W2019"; rows from 1, columns from 0.</summary>
internal sealed record CellRange(int FirstRow, int LastRow, int FirstColumn, int LastColumn)
{
    public static CellRange Parse(string text, string fileName)
    {
        string[] ends = text.Replace("$", "", StringComparison.Ordinal).Trim().ToUpperInvariant().Split(':');
        if (ends.Length == 2 && Cell(ends[0]) is { } a && Cell(ends[1]) is { } b && a.Row <= b.Row && a.Column <= b.Column)
            return new CellRange(a.Row, b.Row, a.Column, b.Column);
        throw new UnreadableFileException($"'{Blanks.OneLine(text)}' is no range of {fileName}; write it like B3:W2019.");
    }

    private static (int Row, int Column)? Cell(string text)
    {
        int i = 0, column = 0;
        while (i < text.Length && text[i] is >= 'A' and <= 'Z' && i < 3)
            column = column * 26 + (text[i++] - 'A' + 1);
        return i > 0 && int.TryParse(text.AsSpan(i), NumberStyles.None, CultureInfo.InvariantCulture, out int row) && row > 0 ? (row, column - 1) : null;
    }
}
