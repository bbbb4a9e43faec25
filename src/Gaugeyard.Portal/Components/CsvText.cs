using System.Globalization;

namespace Gaugeyard.Portal.Components;

/// <summary>A shown table as CSV (RFC 4180); text that a spreadsheet would take for a formula is quoted with an apostrophe.</summary>
public static class CsvText
{
    public static string Of(IReadOnlyList<IReadOnlyList<string>> rows) => string.Join("\r\n", rows.Select(r => string.Join(',', r.Select(Cell)))) + "\r\n";

    private static string Cell(string text)
    {
        // numbers for people carry a typographic minus, which no spreadsheet reads
        string plain = text.Replace('\u2212', '-').Replace("\u00a0", " ").Replace("\u2009", "");
        if (plain.Length > 0 && (plain[0] is '=' or '@' or '\t' or '\r' || (plain[0] is '-' or '+' && !double.TryParse(plain, NumberStyles.Number, CultureInfo.InvariantCulture, out _))))
            plain = "'" + plain;
        return plain.AsSpan().IndexOfAny("\",\r\n") >= 0 ? $"\"{plain.Replace("\"", "\"\"")}\"" : plain;
    }
}
