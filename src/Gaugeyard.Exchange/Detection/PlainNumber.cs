using System.Globalization;
using System.Runtime.CompilerServices;
using csFastFloat;

namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// Parses numbers as instruments write them: an optional minus, digits, at most one decimal mark, an optional exponent, and
/// nothing else. No blanks, no thousands, no "inf". "007" is refused, since a leading zero makes an identifier.
/// </summary>
internal static class PlainNumber
{
    /// <summary>What the text looked like.</summary>
    /// <param name="Recoverable">Whether the shortest text of the number is the text itself.</param>
    /// <param name="WholeDigits">Digits before the mark.</param>
    /// <param name="Decimals">Digits after the mark.</param>
    /// <param name="StartsWithZero">Whether the first digit is zero.</param>
    public readonly record struct Form(bool Recoverable, int WholeDigits, int Decimals, bool StartsWithZero);

    private static readonly double[] Tens = [1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18];

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public static bool TryParse(ReadOnlySpan<char> text, char mark, out double value, out Form form)
    {
        value = 0;
        form = default;
        int i = 0;
        bool negative = text[0] == '-';
        if (negative)
            i = 1;
        int start = i;
        long mantissa = 0;
        int n = text.Length;
        if (n - start > 40)
            return TryLong(text, mark, out value, out form);
        while (i < n && (uint)(text[i] - '0') <= 9)
        {
            if (i - start >= 18)
                return TryLong(text, mark, out value, out form);
            mantissa = mantissa * 10 + (text[i] - '0');
            i++;
        }
        int whole = i - start;
        if (whole > 1 && text[start] == '0')
            return false;
        int decimals = 0;
        if (i < n && text[i] == mark)
        {
            i++;
            int from = i;
            while (i < n && (uint)(text[i] - '0') <= 9)
            {
                if (whole + i - from >= 18)
                    return TryLong(text, mark, out value, out form);
                mantissa = mantissa * 10 + (text[i] - '0');
                i++;
            }
            decimals = i - from;
            if (decimals == 0)
                return false;
        }
        if (whole + decimals == 0)
            return false;
        if (i < n)
            return (text[i] is 'e' or 'E') && TryLong(text, mark, out value, out form);
        if (mantissa > 1L << 53)
            return TryLong(text, mark, out value, out form);
        // both operands are exact doubles, so the quotient is the correctly rounded value (Clinger's fast path)
        double magnitude = mantissa / Tens[decimals];
        value = negative ? -magnitude : magnitude;
        bool startsWithZero = whole > 0 && text[start] == '0';
        bool recoverable = whole > 0 && whole + decimals <= 15 && (decimals == 0 || text[n - 1] != '0') && (magnitude >= 1e-4 || mantissa == 0);
        form = new Form(recoverable, whole, decimals, startsWithZero);
        return true;
    }

    /// <summary>Shortest text that reads back to the number, without exponent for integers up to 15 digits.</summary>
    public static string Text(double value) => value.ToString("R", CultureInfo.InvariantCulture);

    // long digit strings and exponents; the parser accepts a prefix, so all characters must have been used
    private static bool TryLong(ReadOnlySpan<char> text, char mark, out double value, out Form form)
    {
        form = default;
        value = 0;
        foreach (char c in text)
            if (!char.IsAsciiDigit(c) && c != mark && c is not ('-' or '+' or 'e' or 'E'))
                return false;
        int first = text[0] == '-' ? 1 : 0;
        if (text.Length > first + 1 && text[first] == '0' && char.IsAsciiDigit(text[first + 1]))
            return false;
        if (text.Length <= first || !(char.IsAsciiDigit(text[first]) || text[first] == mark) || !char.IsAsciiDigit(text[^1]))
            return false;
        return FastDoubleParser.TryParseDouble(text, out int used, out value, NumberStyles.Float, mark) && used == text.Length && double.IsFinite(value);
    }
}
