using System.Text;

namespace Gaugeyard.Exchange.Text;

/// <summary>
/// Splits delimited text as RFC 4180 says, and forgives what people's files do besides: a quote inside an unquoted field is a
/// character like any other, and text after a closing quote belongs to the field. Used for the beginning of a file and for
/// the rare stretches with stray quotes; regular stretches go through the fast reader, which agrees with this one.
/// </summary>
internal ref struct FieldReader(ReadOnlySpan<char> text, char delimiter, int firstLine)
{
    private readonly ReadOnlySpan<char> _text = text;
    private int _at;
    private int _line = firstLine;

    /// <summary>Line where the current record begins, from 1.</summary>
    public int Line { get; private set; }

    /// <summary>Line where a quote opened that the text does not close; 0 when all are closed.</summary>
    public int OpenQuoteLine { get; private set; }

    /// <summary>Reads the next record into the list; false at the end.</summary>
    public bool Read(List<string> fields)
    {
        fields.Clear();
        if (_at >= _text.Length)
            return false;
        Line = _line;
        while (true)
        {
            fields.Add(Field());
            if (_at >= _text.Length)
                return true;
            char c = _text[_at++];
            if (c == delimiter)
            {
                if (_at < _text.Length)
                    continue;
                fields.Add("");
                return true;
            }
            if (c == '\r' && _at < _text.Length && _text[_at] == '\n')
                _at++;
            _line++;
            return true;
        }
    }

    // stops at the delimiter, the line end or the end of the text
    private string Field()
    {
        int start = _at;
        int quote = start;
        while (quote < _text.Length && _text[quote] == ' ' && delimiter != ' ')
            quote++;
        if (quote >= _text.Length || _text[quote] != '"')
        {
            _at = EndOfPlain(start);
            return _text[start.._at].ToString();
        }
        var builder = new StringBuilder();
        int i = quote + 1, opened = _line;
        while (true)
        {
            int next = _text[i..].IndexOf('"');
            if (next < 0)
            {
                OpenQuoteLine = opened;
                builder.Append(_text[i..]);
                _at = _text.Length;
                return builder.ToString();
            }
            var part = _text.Slice(i, next);
            _line += Lines.Count(part);
            builder.Append(part);
            i += next + 1;
            if (i < _text.Length && _text[i] == '"')
            {
                builder.Append('"');
                i++;
                continue;
            }
            break;
        }
        _at = EndOfPlain(i);
        var rest = _text[i.._at];
        if (!rest.IsWhiteSpace())
            builder.Append(rest);
        return builder.ToString();
    }

    private readonly int EndOfPlain(int from)
    {
        int end = _text[from..].IndexOfAny(delimiter, '\r', '\n');
        return end < 0 ? _text.Length : from + end;
    }
}

/// <summary>Line ends: CRLF, LF or CR.</summary>
internal static class Lines
{
    /// <summary>Number of line ends in a text that does not end between CR and LF.</summary>
    public static int Count(ReadOnlySpan<char> text)
    {
        int feeds = text.Count('\n');
        int returns = text.Count('\r');
        return returns == 0 ? feeds : feeds + returns - text.Count("\r\n");
    }
}
