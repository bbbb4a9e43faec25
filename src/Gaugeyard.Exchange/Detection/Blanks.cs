namespace Gaugeyard.Exchange.Detection;

/// <summary>Blanks as files have them: no-break and thin spaces, byte-order marks, zero-width joiners.</summary>
internal static class Blanks
{
    private static bool IsBlank(char c) => char.IsWhiteSpace(c) || c is '\uFEFF' or '\u200B' or '\u2060';

    /// <summary>The text without blanks around it; the same instance when there are none.</summary>
    public static string Trim(string text)
    {
        if (text.Length == 0 || !IsBlank(text[0]) && !IsBlank(text[^1]))
            return text;
        int start = 0, end = text.Length;
        while (start < end && IsBlank(text[start]))
            start++;
        while (end > start && IsBlank(text[end - 1]))
            end--;
        return text[start..end];
    }

    /// <summary>True minus and dashes before a digit as '-', special spaces as ' '.</summary>
    public static string Normal(this string text)
    {
        if (System.Text.Ascii.IsValid(text))
            return text;
        var chars = text.ToCharArray();
        for (int i = 0; i < chars.Length; i++)
            chars[i] = chars[i] switch
            {
                '\u2212' or '\u2013' when i + 1 < chars.Length && char.IsAsciiDigit(chars[i + 1]) => '-',
                '\u00a0' or '\u202f' or '\u2009' or '\u2007' => ' ',
                '\u2019' => '\'',
                _ => chars[i],
            };
        return new string(chars);
    }

    /// <summary>One line, blanks run together: for names and for quoting in sentences.</summary>
    public static string OneLine(string text, int most = 60)
    {
        string line = string.Join(' ', text.Split((char[]?)null, StringSplitOptions.RemoveEmptyEntries));
        return line.Length <= most ? line : line[..(most - 1)] + "…";
    }
}
