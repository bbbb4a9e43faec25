namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// Keeps text in delimited files from being taken for something else. A text that begins with one of = + - @, a tab or a
/// line end would be run as a formula by spreadsheet programs; a text such as "n/a" would read back as missing. Such a text
/// is written with an apostrophe before it, and so is a text that begins with an apostrophe before any of these; reading
/// takes one apostrophe away exactly where writing puts one.
/// </summary>
internal static class FormulaText
{
    private static bool Begins(char c) => c is '=' or '+' or '-' or '@' or '\t' or '\r' or '\n';

    // apostrophes, then something that needs one
    private static bool Needs(string text)
    {
        int i = 0;
        while (i < text.Length && text[i] == '\'')
            i++;
        return i < text.Length && Begins(text[i]) || MissingText.IsUsual(Blanks.Trim(text[i..]), amongNumbers: true);
    }

    /// <summary>The text as it is written.</summary>
    public static string Guard(string text) => Needs(text) ? "'" + text : text;

    /// <summary>The text as it was before it was written.</summary>
    public static string Undo(string text) => text.Length > 1 && text[0] == '\'' && Needs(text[1..]) ? text[1..] : text;
}
