using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>Leaves out rows of totals and averages, and footnotes, at the end of a table.</summary>
internal static class Totals
{
    private static readonly HashSet<string> Words = new(StringComparer.OrdinalIgnoreCase)
    {
        "total", "totals", "sum", "subtotal", "grand total", "average", "averages", "avg", "mean", "means", "median", "count", "min", "max", "minimum", "maximum", "std", "stdev", "sd", "summe", "gesamt", "mittelwert", "mittel", "durchschnitt", "overall", "season total", "season mean",
    };

    public static void CutOff(RawTable raw, List<LeftOutRow> leftOut, List<Finding> findings)
    {
        int count = raw.Count;
        int typical = TypicalFilled(raw, count);
        int cut = count;
        for (int row = count - 1; row > 0 && count - row <= 8; row--)
        {
            string label = FirstText(raw, row, out int filled);
            string bare = label.TrimEnd(':', '.', ' ');
            bool total = Words.Contains(bare) || bare.Length <= 40 && Words.Contains(bare.Split(' ', 2)[0]) && filled < typical;
            bool footnote = filled == 1 && typical >= 3 && (label.Length > 25 || label.StartsWith('*') || label.StartsWith('†'));
            if (!total && !footnote)
                break;
            leftOut.Add(new LeftOutRow(raw.Rows[row], RowText(raw, row), total ? "a row of totals at the end" : "a note below the table"));
            cut = row;
        }
        if (cut == count)
            return;
        findings.Add(new Finding(Severity.Note, null, null, $"{count - cut} {(count - cut == 1 ? "row" : "rows")} at the end ({Blanks.OneLine(RowText(raw, cut), 60)}) hold totals or notes, not runs; left out"));
        foreach (var column in raw.Columns)
            column.Truncate(cut);
        raw.Rows.Truncate(cut);
    }

    private static int TypicalFilled(RawTable raw, int count)
    {
        var filled = new List<int>();
        for (int row = 0; row < Math.Min(count, 200); row++)
            filled.Add(raw.Columns.Count(c => !c.IsBlank(row)));
        filled.Sort();
        return filled[filled.Count / 2];
    }

    private static string FirstText(RawTable raw, int row, out int filled)
    {
        string first = "";
        filled = 0;
        foreach (var column in raw.Columns)
            if (!column.IsBlank(row))
            {
                filled++;
                if (first.Length == 0)
                    first = Blanks.Trim(column.TextAt(row));
            }
        return first;
    }

    private static string RowText(RawTable raw, int row) =>
        Blanks.OneLine(string.Join(" | ", raw.Columns.Where(c => !c.IsBlank(row)).Select(c => c.TextAt(row))), 120);
}
