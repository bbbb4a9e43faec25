using System.Buffers;
using System.Text;
using Gaugeyard.Exchange.Detection;

namespace Gaugeyard.Exchange.Text;

/// <summary>
/// A table in delimited text. The beginning is looked at to find encoding, delimiter and layout; then the file is streamed in
/// segments that end at record ends, parsed side by side and joined in order, so that the result does not depend on threads.
/// </summary>
internal sealed class TextTable : ITableSource
{
    private const int HeadBytes = 2 << 20, HeadRows = 400;

    private readonly ArrivingFile _file;
    private readonly ReadLimits _limits;
    private Encodings.Found _encoding;
    private readonly bool _encodingChosen;

    public TextTable(ArrivingFile file, ReadChoices choices, ReadLimits limits)
    {
        _file = file;
        _limits = limits;
        _encodingChosen = choices.Encoding is not null;
        byte[] bytes = new byte[(int)Math.Min(HeadBytes, file.Length)];
        using (var stream = file.Open())
            bytes = bytes[..stream.ReadAtLeast(bytes, bytes.Length, throwOnEndOfStream: false)];
        if (bytes.Length == 0)
            throw new UnreadableFileException($"{file.Name} is empty: it has no bytes. Export it again and upload the new file.");
        bool whole = bytes.Length == file.Length;
        _encoding = Encodings.Recognise(bytes, whole, choices.Encoding, file.Name);
        string head = DecodeHead(bytes.AsSpan(_encoding.Mark));
        int nul = head.IndexOf('\0', StringComparison.Ordinal);
        if (nul >= 0)
            throw Encodings.NulBytes(file.Name, Lines.Count(head.AsSpan(0, nul)) + 1);

        int skip = 0, firstLine = 1;
        char? told = null;
        if (head.AsSpan().TrimStart("\uFEFF\"").StartsWith("sep=", StringComparison.OrdinalIgnoreCase))
        {
            int end = head.AsSpan().IndexOfAny('\r', '\n');
            string line = end < 0 ? head : head[..end];
            if (line.Trim('"', '\uFEFF').Length is 4 or 5)
            {
                told = line.Trim('"', '\uFEFF') is { Length: 5 } five ? five[4] : null;
                skip = end < 0 ? head.Length : head[end] == '\r' && end + 1 < head.Length && head[end + 1] == '\n' ? end + 2 : end + 1;
                firstLine = 2;
            }
        }
        var text = head.AsSpan(skip);
        Delimiter = choices.Delimiter ?? told ?? Delimiters.Find(text[..Math.Min(text.Length, 1 << 17)]);
        if (Delimiter is '"' or '\r' or '\n')
            throw new UnreadableFileException($"{file.Name} cannot be split at '{Delimiter}'; choose comma, semicolon, tab or pipe.");

        var rows = new List<HeadRow>();
        var reader = new FieldReader(text, Delimiter, firstLine);
        var fields = new List<string>();
        while (rows.Count < HeadRows && reader.Read(fields))
        {
            if (fields.Count > limits.Columns)
                throw new UnreadableFileException($"{file.Name}, row {reader.Line} has {fields.Count:N0} columns; at most {limits.Columns:N0} are taken. Check the separator, or leave out columns that are not needed.");
            if (!fields.TrueForAll(string.IsNullOrWhiteSpace))
                rows.Add(new HeadRow(reader.Line, [.. fields]));
        }
        if (reader.OpenQuoteLine > 0)
        {
            if (whole)
                throw OpenQuote(reader.OpenQuoteLine);
            // the last record of a cut text may be half a record
            if (rows.Count > 1)
                rows.RemoveAt(rows.Count - 1);
        }
        else if (!whole && rows.Count is > 1 and < HeadRows)
            rows.RemoveAt(rows.Count - 1);
        Head = rows;
        MixedLineEnds = head.Contains("\r\n", StringComparison.Ordinal) && head.AsSpan().Count('\n') > head.AsSpan().Count("\r\n");
        UsualDecimalMark = Delimiter == ',' ? '.' : DecimalMarks.Usual(rows);
    }

    public char Delimiter { get; }

    public string EncodingName => _encoding.Name;

    public bool MixedLineEnds { get; }

    public IReadOnlyList<HeadRow> Head { get; }

    public IReadOnlyList<(int Row, int From, int To)> Merged => [];

    public char UsualDecimalMark { get; }

    /// <summary>What the file is, as a phrase.</summary>
    public string What => $"text separated by {Delimiters.Say(Delimiter)}, {_encoding.Label}{_file.Wrapping}";

    public void Dispose()
    {
    }

    public RawTable Read(ReadPlan plan, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken)
    {
        try
        {
            return ReadOnce(plan, atMost, progress, cancellationToken);
        }
        catch (DecoderFallbackException e) when (_encoding.Name == "utf-8" && !_encodingChosen)
        {
            // the beginning was valid UTF-8 and a later byte is not: Windows-1252 has a character for every byte
            _ = e;
            _encoding = Encodings.Windows1252();
            return ReadOnce(plan, atMost, progress, cancellationToken);
        }
        catch (DecoderFallbackException e)
        {
            throw new UnreadableFileException($"{_file.Name} is not valid {_encoding.Label}. Choose another encoding, or save the file as UTF-8.", e);
        }
    }

    private RawTable ReadOnce(ReadPlan plan, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken)
    {
        var joined = new Joined(plan, _limits, _file.Name);
        int side = Math.Clamp(Environment.ProcessorCount, 1, 8);
        var ahead = new Queue<(Task<SegmentParser> Work, Segment Segment)>();
        var idle = new Stack<SegmentParser>();
        bool ended = true;
        long charsJoined = 0, bytesRead = 0, charsRead = 0;
        using var stream = _file.Open();
        long length = Math.Max(1, stream.Length);

        void JoinOldest()
        {
            var (work, segment) = ahead.Dequeue();
            var parser = work.GetAwaiter().GetResult();
            if (joined.Add(parser))
            {
                parser.Clear();
                idle.Push(parser);
            }
            charsJoined += segment.Length;
            ArrayPool<char>.Shared.Return(segment.Buffer);
            progress?.Report(Math.Min(1, (double)bytesRead / length * charsJoined / Math.Max(1, charsRead)));
        }

        try
        {
            foreach (var segment in Segments(stream, atMost is null ? 1 << 21 : 1 << 19, read => (bytesRead, charsRead) = read, cancellationToken))
            {
                if (ahead.Count >= side)
                    JoinOldest();
                if (atMost is { } most && joined.Rows.Count >= most)
                {
                    ended = false;
                    ArrayPool<char>.Shared.Return(segment.Buffer);
                    break;
                }
                int capacity = Math.Max(256, segment.Length / Math.Max(8, plan.Layout.Names.Length * 4));
                var parser = idle.Count > 0 ? idle.Pop() : new SegmentParser(plan, Delimiter, _file.Name, capacity);
                ahead.Enqueue((Task.Run(() => parser.Parse(segment), cancellationToken), segment));
            }
            while (ahead.Count > 0)
                JoinOldest();
        }
        finally
        {
            // a failure must not leave workers with rented buffers behind
            while (ahead.Count > 0)
            {
                var (work, segment) = ahead.Dequeue();
                ((IAsyncResult)work).AsyncWaitHandle.WaitOne();
                ArrayPool<char>.Shared.Return(segment.Buffer);
            }
        }
        double share = ended ? 1 : (double)bytesRead / length * charsJoined / Math.Max(1, charsRead);
        if (atMost is { } limit && joined.Rows.Count > limit)
        {
            share *= (double)limit / joined.Rows.Count;
            ended = false;
            joined.Truncate(limit);
        }
        return joined.ToTable(ended, share);
    }

    private IEnumerable<Segment> Segments(FileStream stream, int size, Action<(long Bytes, long Chars)> read, CancellationToken cancellationToken)
    {
        var decoder = _encoding.Encoding.GetDecoder();
        byte[] bytes = new byte[1 << 18];
        long bytesRead = stream.Seek(_encoding.Mark, SeekOrigin.Begin), charsRead = 0;
        char[] buffer = ArrayPool<char>.Shared.Rent(size);
        int filled = 0, line = 1;
        bool last = false;
        try
        {
            while (!last || filled > 0)
            {
                cancellationToken.ThrowIfCancellationRequested();
                while (!last && buffer.Length - filled > _encoding.Encoding.GetMaxCharCount(bytes.Length))
                {
                    int n = stream.Read(bytes);
                    bytesRead += n;
                    last = n == 0;
                    int decoded = decoder.GetChars(bytes.AsSpan(0, n), buffer.AsSpan(filled), flush: last);
                    int nul = buffer.AsSpan(filled, decoded).IndexOf('\0');
                    if (nul >= 0)
                        throw Encodings.NulBytes(_file.Name, line + Lines.Count(buffer.AsSpan(0, filled + nul)));
                    filled += decoded;
                    charsRead += decoded;
                }
                read((bytesRead, charsRead));
                if (filled == 0)
                    yield break;
                var cut = new SegmentCutter(buffer.AsSpan(0, filled), Delimiter, last).Cut();
                if (cut.Unbalanced || last && cut.OpenQuote >= 0)
                    throw OpenQuote(line + Lines.Count(buffer.AsSpan(0, cut.OpenQuote)));
                if (cut.Length == 0)
                {
                    if (cut.OpenQuote >= 0 && filled - cut.OpenQuote > _limits.CellCharacters)
                        throw new UnreadableFileException($"{_file.Name}: the quote that opens in line {line + Lines.Count(buffer.AsSpan(0, cut.OpenQuote))} is not closed within {_limits.CellCharacters:N0} characters, the limit for one cell. Close the quote or shorten the cell.");
                    if (filled > _limits.RecordCharacters)
                        throw new UnreadableFileException($"{_file.Name}: the record that begins in line {line} is longer than {_limits.RecordCharacters:N0} characters, the limit. Check that the file has line ends.");
                    char[] bigger = ArrayPool<char>.Shared.Rent(buffer.Length * 2);
                    buffer.AsSpan(0, filled).CopyTo(bigger);
                    ArrayPool<char>.Shared.Return(buffer);
                    buffer = bigger;
                    continue;
                }
                int rest = filled - cut.Length;
                char[] next = ArrayPool<char>.Shared.Rent(Math.Max(size, rest * 2));
                buffer.AsSpan(cut.Length, rest).CopyTo(next);
                var segment = new Segment(buffer, cut.Length, line, cut.HasQuotes, cut.Regular);
                line += Lines.Count(segment.Text);
                buffer = next;
                filled = rest;
                yield return segment;
            }
        }
        finally
        {
            ArrayPool<char>.Shared.Return(buffer);
        }
    }

    private string DecodeHead(ReadOnlySpan<byte> bytes)
    {
        var decoder = _encoding.Encoding.GetDecoder();
        char[] chars = new char[_encoding.Encoding.GetMaxCharCount(bytes.Length)];
        try
        {
            return new string(chars, 0, decoder.GetChars(bytes, chars, flush: false));
        }
        catch (DecoderFallbackException e)
        {
            throw new UnreadableFileException($"{_file.Name} is not valid {_encoding.Label}. Choose another encoding, or save the file as UTF-8.", e);
        }
    }

    private UnreadableFileException OpenQuote(int line) =>
        new($"{_file.Name}: the quote that opens in line {line} is not closed properly, so it cannot be told where its cell ends. Close it, or double a quote that belongs to the text.");

    /// <summary>The columns of the segments joined so far.</summary>
    private sealed class Joined(ReadPlan plan, ReadLimits limits, string fileName)
    {
        private List<RawColumn>? _columns;
        private readonly List<int> _repeats = [];
        private (int First, int Count) _ragged, _short, _blank;

        public RowMap Rows { get; } = new();

        /// <summary>Appends a segment's columns; false when they were taken over and must not be used again.</summary>
        public bool Add(SegmentParser segment)
        {
            bool copied = _columns is not null;
            if (_columns is null)
                _columns = segment.Columns;
            else
            {
                while (_columns.Count < segment.Columns.Count)
                {
                    var (asText, mark) = plan.Of(_columns.Count);
                    var column = new RawColumn(asText, mark);
                    column.PadTo(Rows.Count);
                    _columns.Add(column);
                }
                for (int c = 0; c < _columns.Count; c++)
                {
                    if (c < segment.Columns.Count)
                        _columns[c].Append(segment.Columns[c]);
                    else
                        _columns[c].PadTo(Rows.Count + segment.Rows.Count);
                }
            }
            Rows.Append(segment.Rows, 0);
            _repeats.AddRange(segment.Repeats);
            _ragged = (_ragged.Count == 0 ? segment.Ragged.First : _ragged.First, _ragged.Count + segment.Ragged.Count);
            _short = (_short.Count == 0 ? segment.Short.First : _short.First, _short.Count + segment.Short.Count);
            _blank = (_blank.Count == 0 ? segment.Blank.First : _blank.First, _blank.Count + segment.Blank.Count);
            if (Rows.Count > limits.Records || (long)Rows.Count * _columns.Count > limits.Cells)
                throw new UnreadableFileException($"{fileName} has more than {limits.Records:N0} records or {limits.Cells:N0} cells, the limits for one file. Split it and upload the parts.");
            return copied;
        }

        public void Truncate(int count)
        {
            foreach (var column in _columns ?? [])
                column.Truncate(count);
            Rows.Truncate(count);
        }

        public RawTable ToTable(bool ended, double share) => new(_columns ?? [], Rows, ended, share, _repeats, _ragged, _short) { Blank = _blank };
    }
}
