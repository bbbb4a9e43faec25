using System.Globalization;
using System.Text;
using Gaugeyard.Exchange.Detection;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange.Handover;

/// <summary>
/// Writes a revision as CSV: UTF-8, commas, decimal points, CRLF, dates as ISO 8601, the same companion columns as the
/// workbook. A text that a spreadsheet would run as a formula (= + - @ tab line end first), or that would read back as
/// missing, is written with an apostrophe before it; <see cref="TableReader"/> takes that apostrophe away again.
/// </summary>
public static class HandoverCsv
{
    /// <summary>Writes the file.</summary>
    public static void Write(Stream target, HandoverContent content, CancellationToken cancel = default)
    {
        var table = new HandoverTable(content);
        using var writer = new StreamWriter(target, new UTF8Encoding(false), 1 << 16, leaveOpen: true) { NewLine = "\r\n" };
        writer.WriteLine(string.Join(',', table.Columns.Select(c => Field(c.Name))));
        Span<char> digits = stackalloc char[40];
        for (int row = 0; row < table.Records; row++)
        {
            if ((row & 4095) == 0)
                cancel.ThrowIfCancellationRequested();
            for (int c = 0; c < table.Columns.Count; c++)
            {
                if (c > 0)
                    writer.Write(',');
                var column = table.Columns[c];
                if (column.Holds != Holds.Value)
                {
                    if (table.CompanionAt(column, row) is { } companion)
                        writer.Write(companion is double number ? number.ToString("R", CultureInfo.InvariantCulture) : Field((string)companion));
                    continue;
                }
                var values = table.Values[column.Of];
                if (values is NumberColumn numbers)
                {
                    if (!double.IsNaN(numbers.Values[row]) && numbers.Values[row].TryFormat(digits, out int n, default, CultureInfo.InvariantCulture))
                        writer.Write(digits[..n]);
                }
                else if (values.TextAt(row) is { } text)
                    writer.Write(values is DateTimeColumn ? text : Field(text));
            }
            writer.Write("\r\n");
        }
    }

    private static readonly System.Buffers.SearchValues<char> NeedQuotes = System.Buffers.SearchValues.Create(",\"\r\n\t;|");

    private static string Field(string text)
    {
        string guarded = FormulaText.Guard(text);
        bool quote = guarded.AsSpan().ContainsAny(NeedQuotes) || guarded.Length > 0 && (guarded[0] is ' ' or '\'' || guarded[^1] == ' ');
        return quote ? "\"" + guarded.Replace("\"", "\"\"", StringComparison.Ordinal) + "\"" : guarded;
    }
}
