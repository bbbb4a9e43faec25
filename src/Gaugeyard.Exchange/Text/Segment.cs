namespace Gaugeyard.Exchange.Text;

/// <summary>A stretch of a text file that holds whole records.</summary>
/// <param name="Buffer">Rented characters.</param>
/// <param name="Length">Characters in use.</param>
/// <param name="FirstLine">Line of the first character, from 1.</param>
/// <param name="HasQuotes">Whether any quote occurs.</param>
/// <param name="Regular">Whether every quote stands where RFC 4180 allows one.</param>
internal sealed record Segment(char[] Buffer, int Length, int FirstLine, bool HasQuotes, bool Regular)
{
    public ReadOnlySpan<char> Text => Buffer.AsSpan(0, Length);
}

/// <summary>Cuts a text at record ends: line ends outside quotes, found by following each quote from where it opens to where it closes.</summary>
internal ref struct SegmentCutter(ReadOnlySpan<char> text, char delimiter, bool last)
{
    private readonly ReadOnlySpan<char> _text = text;

    /// <summary>Characters up to and with the last record end; the whole text when it is the last.</summary>
    public int Length { get; private set; }

    public bool HasQuotes { get; private set; }

    public bool Regular { get; private set; } = true;

    /// <summary>Where the quote stands that the text does not close; -1 when all are closed.</summary>
    public int OpenQuote { get; private set; } = -1;

    /// <summary>Whether the quote at <see cref="OpenQuote"/> found a partner that closes nothing: a quoted field over several lines followed by more text.</summary>
    public bool Unbalanced { get; private set; }

    public SegmentCutter Cut()
    {
        int at = 0, end = 0;
        while (true)
        {
            int found = _text[at..].IndexOf('"');
            int outside = found < 0 ? _text.Length : at + found;
            end = Math.Max(end, LineEnd(at, outside));
            if (found < 0)
                break;
            HasQuotes = true;
            int opens = OpensField(outside);
            if (opens == 0)
            {
                Regular = false;
                at = outside + 1;
                continue;
            }
            Regular &= opens == 1;
            int close = Closing(outside + 1);
            // a quote at the very end may be the first half of a doubled one
            if (close < 0 || close == _text.Length - 1 && !last)
            {
                OpenQuote = outside;
                Length = last ? _text.Length : end;
                return this;
            }
            int after = close + 1;
            if (after < _text.Length && _text[after] != delimiter && _text[after] is not ('\r' or '\n'))
            {
                Regular = false;
                if (_text[outside..close].ContainsAny('\r', '\n') && !BlankUntilEnd(after))
                {
                    Unbalanced = true;
                    OpenQuote = outside;
                    return this;
                }
            }
            at = after;
        }
        Length = last ? _text.Length : end;
        return this;
    }

    // 1: at the start of a field; 2: after blanks at the start of a field; 0: inside a field
    private readonly int OpensField(int quote)
    {
        int before = quote - 1;
        while (before >= 0 && _text[before] == ' ' && delimiter != ' ')
            before--;
        bool start = before < 0 || _text[before] == delimiter || _text[before] is '\r' or '\n';
        return !start ? 0 : before == quote - 1 ? 1 : 2;
    }

    private readonly int Closing(int from)
    {
        while (true)
        {
            int found = _text[from..].IndexOf('"');
            if (found < 0)
                return -1;
            int at = from + found;
            if (at + 1 < _text.Length && _text[at + 1] == '"')
            {
                from = at + 2;
                continue;
            }
            return at;
        }
    }

    private readonly bool BlankUntilEnd(int from)
    {
        int i = from;
        while (i < _text.Length && _text[i] == ' ')
            i++;
        return i == _text.Length || _text[i] == delimiter || _text[i] is '\r' or '\n';
    }

    // position after the last line end in a stretch; never between CR and LF
    private readonly int LineEnd(int from, int to)
    {
        while (to > from)
        {
            int found = _text[from..to].LastIndexOfAny('\r', '\n');
            if (found < 0)
                return 0;
            int at = from + found;
            if (_text[at] == '\n' || at + 1 < _text.Length && _text[at + 1] != '\n' || at + 1 == _text.Length && last)
                return at + 1;
            to = at;
        }
        return 0;
    }
}
