using System.Runtime.CompilerServices;
using Gaugeyard.Exchange.Detection;
using nietras.SeparatedValues;

namespace Gaugeyard.Exchange.Text;

/// <summary>Reads the records of one segment into columns of its own; independent of every other segment.</summary>
internal sealed class SegmentParser(ReadPlan plan, char delimiter, string fileName, int capacity)
{
    private readonly int _first = plan.Layout.FirstColumn;
    private readonly int _width = plan.Layout.Names.Length;
    private readonly int _fromLine = plan.Layout.FirstDataRow;
    private readonly string[] _names = plan.Layout.HeaderRows.Count == 1 ? plan.Layout.Names : [];

    public List<RawColumn> Columns { get; } = [];

    public RowMap Rows { get; private set; } = new();

    public List<int> Repeats { get; } = [];

    public (int First, int Count) Ragged { get; private set; }

    public (int First, int Count) Short { get; private set; }

    public (int First, int Count) Blank { get; private set; }

    public SegmentParser Parse(Segment segment)
    {
        while (Columns.Count < _width)
            AddColumn();
        if (segment.Regular)
            ParseRegular(segment);
        else
            ParseForgiving(segment);
        foreach (var column in Columns)
            column.PadTo(Rows.Count);
        return this;
    }

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    private void ParseRegular(Segment segment)
    {
        using var reader = new Sep(delimiter).Reader(o => o with
        {
            HasHeader = false,
            Unescape = segment.HasQuotes,
            DisableQuotesParsing = !segment.HasQuotes,
            DisableColCountCheck = true,
        }).From(new SegmentTextReader(segment.Buffer, segment.Length));
        int next = segment.FirstLine;
        foreach (var row in reader)
        {
            // a record begins where the one before it ended; the reader's own first line number is one too high without a header
            int line = next;
            next = segment.FirstLine + row.LineNumberToExcl - 1;
            if (line < _fromLine)
                continue;
            int n = row.ColCount;
            var first = row[0].Span;
            if (first.IsWhiteSpace())
            {
                bool blank = true;
                for (int c = 1; c < n && blank; c++)
                    blank = row[c].Span.IsWhiteSpace();
                if (blank)
                {
                    if (n > 1)
                        Blank = (Blank.Count == 0 ? line : Blank.First, Blank.Count + 1);
                    continue;
                }
            }
            if (_names.Length > 0 && _first < n && row[_first].Span.SequenceEqual(_names[0]) && n >= _first + _names.Length)
            {
                bool same = true;
                for (int c = 1; c < _names.Length && same; c++)
                    same = row[_first + c].Span.Trim().SequenceEqual(_names[c]);
                if (same)
                {
                    Repeats.Add(line);
                    continue;
                }
            }
            BeginRow(line, n);
            int known = Math.Min(n - _first, Columns.Count);
            for (int c = 0; c < known; c++)
            {
                var span = row[c + _first].Span;
                if (span.Length > plan.Limits.CellCharacters)
                    throw TooLong(line, c, span.Length);
                Columns[c].Add(span);
            }
            for (int c = known; c < Columns.Count; c++)
                Columns[c].AddBlank();
            for (int c = Columns.Count + _first; c < n; c++)
                if (!row[c].Span.IsWhiteSpace())
                    Grow(c - _first, row[c].Span);
            EndRow();
        }
    }

    /// <summary>Empties the parser for another segment, keeping its memory.</summary>
    public void Clear()
    {
        Columns.RemoveRange(_width, Columns.Count - _width);
        foreach (var column in Columns)
            column.Clear();
        Rows = new RowMap();
        Repeats.Clear();
        Ragged = Short = Blank = default;
    }

    private void ParseForgiving(Segment segment)
    {
        var reader = new FieldReader(segment.Text, delimiter, segment.FirstLine);
        var fields = new List<string>();
        while (reader.Read(fields))
        {
            if (reader.Line < _fromLine)
                continue;
            if (fields.TrueForAll(string.IsNullOrWhiteSpace))
            {
                if (fields.Count > 1)
                    Blank = (Blank.Count == 0 ? reader.Line : Blank.First, Blank.Count + 1);
                continue;
            }
            if (_names.Length > 0 && fields.Count >= _first + _names.Length && Enumerable.Range(0, _names.Length).All(c => Blanks.Trim(fields[_first + c]) == _names[c]))
            {
                Repeats.Add(reader.Line);
                continue;
            }
            BeginRow(reader.Line, fields.Count);
            for (int c = 0; c < Columns.Count; c++)
            {
                string field = c + _first < fields.Count ? fields[c + _first] : "";
                if (field.Length > plan.Limits.CellCharacters)
                    throw TooLong(reader.Line, c, field.Length);
                Columns[c].Add(field);
            }
            for (int c = Columns.Count + _first; c < fields.Count; c++)
                if (!string.IsNullOrWhiteSpace(fields[c]))
                    Grow(c - _first, fields[c]);
            EndRow();
        }
    }

    private void BeginRow(int line, int fields)
    {
        if (fields - _first < _width)
            Short = (Short.Count == 0 ? line : Short.First, Short.Count + 1);
        Rows.Add(line);
    }

    private void EndRow()
    {
        if (Columns.Count > _width)
            foreach (var column in Columns)
                column.PadTo(Rows.Count);
    }

    // a row with more cells than names makes the table wider: nothing that a file holds is dropped
    private void Grow(int column, ReadOnlySpan<char> text)
    {
        int line = Rows[Rows.Count - 1];
        if (column >= plan.Limits.Columns)
            throw new UnreadableFileException($"{fileName}, row {line} has more than {plan.Limits.Columns:N0} cells, the limit. Check the separator, or leave out columns that are not needed.");
        if (text.Length > plan.Limits.CellCharacters)
            throw TooLong(line, column, text.Length);
        Ragged = (Ragged.Count == 0 ? line : Ragged.First, Ragged.Count + 1);
        while (Columns.Count <= column)
            AddColumn();
        Columns[column].PadTo(Rows.Count - 1);
        Columns[column].Add(text);
    }

    private void AddColumn()
    {
        var (asText, mark) = plan.Of(Columns.Count);
        Columns.Add(new RawColumn(asText, mark, capacity));
    }

    private UnreadableFileException TooLong(int line, int column, int length) =>
        new($"{fileName}, row {line}, column {(column < _width && plan.Layout.Names[column].Length > 0 ? plan.Layout.Names[column] : $"{column + 1}")} holds a cell of {length:N0} characters; at most {plan.Limits.CellCharacters:N0} are taken. A quote that is never closed may be the cause.");
}

/// <summary>Hands the characters of a segment to a reader without copying the whole.</summary>
internal sealed class SegmentTextReader(char[] buffer, int length) : TextReader
{
    private int _at;

    public override int Peek() => _at < length ? buffer[_at] : -1;

    public override int Read() => _at < length ? buffer[_at++] : -1;

    public override int Read(char[] to, int index, int count) => Read(to.AsSpan(index, count));

    public override int Read(Span<char> to)
    {
        int n = Math.Min(to.Length, length - _at);
        buffer.AsSpan(_at, n).CopyTo(to);
        _at += n;
        return n;
    }

    public override int ReadBlock(Span<char> to) => Read(to);
}
