namespace Gaugeyard.Exchange.Detection;

/// <summary>What a text that is no plain number says besides its number.</summary>
internal enum NumberNote
{
    /// <summary>Nothing: only marks between thousands, a plus sign or blanks.</summary>
    None,

    /// <summary>A footnote mark after the number: "7.4*".</summary>
    Footnote,

    /// <summary>Below or above what could be measured: "&lt;0.1".</summary>
    Censored,

    /// <summary>Infinite or beyond what a double holds.</summary>
    Infinite,

    /// <summary>A unit after the number: "230 kPa".</summary>
    Unit,
}

/// <summary>Reads numbers as people write them: thousands, decimal comma, footnote marks, limits, units after the number.</summary>
internal static class NumberText
{
    private const string FootnoteMarks = "*†‡§¹²³ª°¶#!";

    /// <summary>Reads a text as a number.</summary>
    /// <param name="raw">The cell's text.</param>
    /// <param name="mark">The decimal mark.</param>
    /// <param name="value">The number; NaN when it is censored or infinite.</param>
    /// <param name="note">What else the text says.</param>
    /// <param name="extra">The footnote mark or unit.</param>
    public static bool TryRead(string raw, char mark, out double value, out NumberNote note, out string extra)
    {
        value = double.NaN;
        note = NumberNote.None;
        extra = "";
        var text = Blanks.Trim(raw).Normal();
        if (text.Length is 0 or > 60)
            return false;
        if (text[0] is '<' or '>' or '≤' or '≥' or '~' && text.Length > 1)
        {
            string rest = text[1..].TrimStart('=', ' ');
            if (rest.Length == 0 || !TryCore(rest, mark, out _))
                return false;
            note = NumberNote.Censored;
            extra = text[..1];
            return true;
        }
        if (text.Trim('+', '-').ToLowerInvariant() is "inf" or "infinity" or "∞" or "infinite")
        {
            note = NumberNote.Infinite;
            return true;
        }
        if (TryCore(text, mark, out value))
        {
            if (double.IsInfinity(value))
            {
                value = double.NaN;
                note = NumberNote.Infinite;
            }
            return true;
        }
        int end = text.Length;
        while (end > 0 && FootnoteMarks.Contains(text[end - 1]))
            end--;
        if (end < text.Length && end > 0 && TryCore(text[..end].TrimEnd(), mark, out value))
        {
            note = NumberNote.Footnote;
            extra = text[end..];
            return true;
        }
        if (text[^1] == ')' && text.LastIndexOf('(') is > 0 and var open && text.Length - open <= 4 && TryCore(text[..open].TrimEnd(), mark, out value))
        {
            note = NumberNote.Footnote;
            extra = text[open..];
            return true;
        }
        end = 0;
        while (end < text.Length && (char.IsAsciiDigit(text[end]) || text[end] is '+' or '-' or '.' or ',' or '\''))
            end++;
        // "12e3 kWh" is nobody's way of writing; a unit begins with a letter, a degree or a percent sign
        if (end > 0 && end < text.Length)
        {
            string suffix = text[end..].Trim();
            if ((char.IsLetter(suffix[0]) || suffix[0] is '%' or '°' or 'µ') && UnitText.IsUnit(suffix) && TryCore(text[..end].TrimEnd(), mark, out value))
            {
                note = NumberNote.Unit;
                extra = suffix;
                return true;
            }
        }
        value = double.NaN;
        return false;
    }

    /// <summary>Counts of what a text shows about the decimal mark.</summary>
    /// <returns>',' or '.' when the text decides, '3' when it has one mark before exactly three digits, '\0' when it says nothing.</returns>
    public static char Shows(string raw)
    {
        string text = Blanks.Trim(raw).TrimEnd('*', '†', '‡').TrimStart('<', '>', '-', '+', '−');
        int commas = 0, points = 0, last = -1, digits = 0;
        for (int i = 0; i < text.Length; i++)
        {
            char c = text[i];
            if (c is ',' or '.')
            {
                if (c == ',')
                    commas++;
                else
                    points++;
                last = i;
            }
            else if (char.IsAsciiDigit(c))
                digits++;
            else if (c is not (' ' or '\u00a0' or '\u202f' or '\''))
                return '\0';
        }
        if (digits == 0 || last < 0 || commas > 1 && points > 1)
            return '\0';
        char final = text[last];
        if (commas > 0 && points > 0)
            return final;
        char other = final == ',' ? '.' : ',';
        if (commas + points > 1)
        {
            // several marks of one sort separate thousands, unless it is a date: 1.234.567 but 07.04.2031
            string[] groups = text.Replace(" ", "", StringComparison.Ordinal).Split(final);
            return groups[0].Length is >= 1 and <= 3 && groups.Skip(1).All(g => g.Length == 3) ? other : '\0';
        }
        int after = text.Length - last - 1;
        return after == 3 && last is >= 1 and <= 3 && text[0] != '0' ? final == ',' ? '3' : '4' : after == 0 ? '\0' : final;
    }

    // digits with an optional mark between thousands: every group after the first has exactly three digits
    private static bool TryCore(string text, char mark, out double value)
    {
        value = double.NaN;
        bool negative = false;
        int at = 0;
        if (text[0] is '-' or '+')
        {
            negative = text[0] == '-';
            at = 1;
        }
        if (at == text.Length || !(char.IsAsciiDigit(text[at]) || text[at] == mark))
            return false;
        int exponent = text.AsSpan(at).IndexOfAny('e', 'E');
        int end = exponent < 0 ? text.Length : at + exponent;
        int decimalAt = text.AsSpan(at, end - at).IndexOf(mark);
        int wholeEnd = decimalAt < 0 ? end : at + decimalAt;
        Span<char> digits = stackalloc char[64];
        int n = 0, group = 0, groups = 0;
        char between = '\0';
        for (int i = at; i < wholeEnd; i++)
        {
            char c = text[i];
            if (char.IsAsciiDigit(c))
            {
                digits[n++] = c;
                group++;
                continue;
            }
            bool thousands = c is ' ' or '\'' || c == (mark == '.' ? ',' : '.');
            if (!thousands || between != '\0' && c != between || (groups == 0 ? group is < 1 or > 3 : group != 3))
                return false;
            between = c;
            groups++;
            group = 0;
        }
        if (groups > 0 && (group != 3 || text[at] == '0'))
            return false;
        if (decimalAt >= 0)
        {
            digits[n++] = '.';
            for (int i = wholeEnd + 1; i < end; i++)
            {
                if (!char.IsAsciiDigit(text[i]))
                    return false;
                digits[n++] = text[i];
            }
        }
        if (n == 0 || digits[..n] is ".")
            return false;
        string tail = text[end..];
        if (tail.Length > 0 && (tail.Length < 2 || tail.AsSpan(1).TrimStart("+-").ContainsAnyExceptInRange('0', '9') || !char.IsAsciiDigit(tail[^1])))
            return false;
        if (!double.TryParse(string.Concat(digits[..n], tail), System.Globalization.NumberStyles.AllowDecimalPoint | System.Globalization.NumberStyles.AllowExponent, System.Globalization.CultureInfo.InvariantCulture, out value))
            return false;
        if (negative)
            value = -value;
        return true;
    }
}
