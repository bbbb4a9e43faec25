namespace Gaugeyard.Exchange.Detection;

/// <summary>Where in a file the names, units and records are.</summary>
/// <param name="HeaderRows">Numbers of the rows that hold the names.</param>
/// <param name="UnitRow">Number of the row that holds the units, or null.</param>
/// <param name="FirstDataRow">Number of the first row that may be a record.</param>
/// <param name="Names">Names by column as the file wrote them; "" where there is none.</param>
/// <param name="Units">The unit row's cells by column; "" where there is none.</param>
/// <param name="FirstColumn">First column of the table, from 0.</param>
/// <param name="Above">Rows above the names.</param>
internal sealed record Layout(
    IReadOnlyList<int> HeaderRows,
    int? UnitRow,
    int FirstDataRow,
    string[] Names,
    string[] Units,
    int FirstColumn,
    IReadOnlyList<HeadRow> Above)
{
    private enum Sort
    {
        Blank,
        Value,
        Word,
    }

    /// <summary>Finds names, units and the first record in the beginning of a file.</summary>
    /// <param name="rows">The beginning, blank rows left out.</param>
    /// <param name="choices">What the user overrules.</param>
    /// <param name="merged">Merged cells as (row number, first column, last column), from the workbook.</param>
    public static Layout Find(IReadOnlyList<HeadRow> rows, ReadChoices choices, IReadOnlyList<(int Row, int From, int To)> merged)
    {
        int width = rows.Max(r => LastFilled(r) + 1);
        int data = choices.HeaderRows is { } chosen
            ? FirstAfter(rows, Math.Max(chosen.Count == 0 ? 0 : chosen.Max(), choices.UnitRow ?? 0))
            : FirstData(rows, width);
        int unit = -1;
        if (choices.UnitRow is { } said)
            unit = said == 0 ? -1 : IndexOf(rows, said);
        else if (choices.HeaderRows is { } ahead)
        {
            // a user who only names the header still has the unit row below it recognised
            if (ahead.Count > 0 && data < rows.Count && IsUnitRow(rows[data], width))
                unit = data++;
        }
        else if (data > 0 && IsUnitRow(rows[data - 1], width) && data > 1)
            unit = data - 1;
        if (choices.UnitRow is not null && choices.HeaderRows is null && unit >= data)
            data = unit + 1;

        var header = new List<int>();
        if (choices.HeaderRows is { } wanted)
            header.AddRange(wanted.Select(n => IndexOf(rows, n)).Where(i => i >= 0).Order());
        else
        {
            int bottom = (unit >= 0 && unit < data ? unit : data) - 1;
            if (bottom >= 0)
            {
                header.Add(bottom);
                while (header.Count < 3 && header[0] > 0 && Joins(rows[header[0] - 1], rows[header[0]], width, merged))
                    header.Insert(0, header[0] - 1);
            }
        }

        int above = header.Count > 0 ? header[0] : Math.Min(data, unit >= 0 ? unit : data);
        var names = JoinNames(header.Select(i => rows[i]).ToList(), width, merged);
        var units = unit >= 0 ? Enumerable.Range(0, width).Select(c => UnitText.Bare(rows[unit].At(c))).ToArray() : Enumerable.Repeat("", width).ToArray();
        // cells beyond the last name make columns of their own when they come
        int named = Array.FindLastIndex(names, n => n.Length > 0) + 1;
        if (header.Count > 0 && named > 0)
        {
            width = Math.Max(named, Array.FindLastIndex(units, u => u.Length > 0) + 1);
            names = names[..width];
            units = units[..width];
        }
        int firstColumn = 0;
        while (firstColumn < width - 1 && names[firstColumn].Length == 0 && rows.Skip(data).All(r => string.IsNullOrWhiteSpace(r.At(firstColumn))))
            firstColumn++;
        return new Layout(
            [.. header.Select(i => rows[i].Number)],
            unit >= 0 ? rows[unit].Number : null,
            data < rows.Count ? rows[data].Number : rows[^1].Number + 1,
            names[firstColumn..],
            units[firstColumn..],
            firstColumn,
            [.. rows.Take(above)]);
    }

    private static int LastFilled(HeadRow row)
    {
        int last = row.Cells.Length - 1;
        while (last >= 0 && string.IsNullOrWhiteSpace(row.Cells[last]))
            last--;
        return last;
    }

    private static int IndexOf(IReadOnlyList<HeadRow> rows, int number)
    {
        for (int i = 0; i < rows.Count; i++)
            if (rows[i].Number == number)
                return i;
        return -1;
    }

    private static int FirstAfter(IReadOnlyList<HeadRow> rows, int number)
    {
        int i = 0;
        while (i < rows.Count && rows[i].Number <= number)
            i++;
        return i;
    }

    // The columns' sorts are taken from the later rows, where records surely are; the first row that fits them begins the records.
    private static int FirstData(IReadOnlyList<HeadRow> rows, int width)
    {
        int from = rows.Count <= 3 ? rows.Count - 1 : rows.Count / 3;
        var valued = new bool[width];
        for (int c = 0; c < width; c++)
        {
            int values = 0, words = 0;
            for (int r = from; r < rows.Count; r++)
            {
                var sort = SortOf(rows[r].At(c));
                values += sort == Sort.Value ? 1 : 0;
                words += sort == Sort.Word ? 1 : 0;
            }
            valued[c] = values > words;
        }
        int typical = Median(rows.Skip(from).Select(r => r.Filled));
        for (int r = 0; r < rows.Count; r++)
        {
            int fit = 0, misfit = 0;
            for (int c = 0; c < width; c++)
            {
                if (!valued[c])
                    continue;
                var sort = SortOf(rows[r].At(c));
                fit += sort == Sort.Value ? 1 : 0;
                misfit += sort == Sort.Word ? 1 : 0;
            }
            // a record may be sparse where the names above it are complete and nothing in it is a word
            bool sparse = misfit == 0 && r > 0 && rows[r - 1].Filled * 10 >= typical * 8 && fit == rows[r].Filled;
            if (fit > misfit && (rows[r].Filled * 2 >= typical || sparse))
                return r;
        }
        // nothing but words: the first full row is the names, and units may stand below it
        int full = rows.Count <= 5 ? rows.Max(r => r.Filled) : typical;
        for (int r = 0; r < rows.Count; r++)
            if (rows[r].Filled * 10 >= full * 8)
                return r + 1 < rows.Count && IsUnitRow(rows[r + 1], width) ? r + 2 : r + 1;
        return 1;
    }

    private static Sort SortOf(string cell)
    {
        string text = Blanks.Trim(cell);
        if (text.Length == 0 || MissingText.IsUsual(text, amongNumbers: false))
            return Sort.Blank;
        if (NumberText.TryRead(text, '.', out _, out _, out _) || NumberText.TryRead(text, ',', out _, out _, out _))
            return Sort.Value;
        return DateText.Read(text, DateOrder.DayFirst, out _) != DateShape.None ? Sort.Value : Sort.Word;
    }

    private static bool IsUnitRow(HeadRow row, int width)
    {
        int units = 0, others = 0;
        for (int c = 0; c < width; c++)
        {
            string cell = Blanks.Trim(row.At(c));
            // "1" and "-" say "no unit" in a unit row, and say nothing about whether it is one
            if (cell is "" or "1" or "-" or "–" or "[-]" or "(-)" or "%")
                continue;
            if (UnitText.IsUnit(UnitText.Bare(cell)) || cell[0] == '[' && cell[^1] == ']')
                units++;
            else
                others++;
        }
        return units >= 1 && units > others;
    }

    // Whether the row above belongs to the names too: a merged cell spans columns there, or this row lacks or repeats names.
    private static bool Joins(HeadRow upper, HeadRow lower, int width, IReadOnlyList<(int Row, int From, int To)> merged)
    {
        if (upper.Filled < 2 && !(upper.Filled == 1 && merged.Any(m => m.Row == upper.Number && m.From > 0 && m.To < width - 1)))
            return false;
        if (upper.Cells.Any(c => Blanks.Trim(c).Length > 80))
            return false;
        if (merged.Any(m => m.Row == upper.Number && m.To > m.From && (m.From > 0 || m.To < width - 1)))
            return true;
        int rescued = 0, lacking = 0;
        var seen = new HashSet<string>(StringComparer.OrdinalIgnoreCase);
        bool repeats = false;
        for (int c = 0; c < width; c++)
        {
            string name = Blanks.Trim(lower.At(c));
            if (name.Length == 0)
            {
                lacking++;
                if (!string.IsNullOrWhiteSpace(upper.At(c)))
                    rescued++;
            }
            else
                repeats |= !seen.Add(name);
        }
        return lower.Filled < width && rescued * 2 >= lacking && rescued > 0 || repeats && upper.Filled >= 2;
    }

    private static string[] JoinNames(List<HeadRow> header, int width, IReadOnlyList<(int Row, int From, int To)> merged)
    {
        var names = new string[width];
        for (int c = 0; c < width; c++)
        {
            var parts = new List<string>();
            for (int i = 0; i < header.Count; i++)
            {
                string part = Blanks.OneLine(header[i].At(c), 200);
                bool last = i == header.Count - 1;
                // a name over several columns stands in the first of them only
                if (part.Length == 0 && !last && Enumerable.Range(i + 1, header.Count - i - 1).Any(k => !string.IsNullOrWhiteSpace(header[k].At(c))))
                {
                    var span = merged.FirstOrDefault(m => m.Row == header[i].Number && m.From <= c && c <= m.To);
                    bool known = merged.Any(m => m.Row == header[i].Number);
                    int from = span.To > 0 ? span.From : known ? -1 : c;
                    if (!known)
                        while (from >= 0 && string.IsNullOrWhiteSpace(header[i].At(from)))
                            from--;
                    if (from >= 0)
                        part = Blanks.OneLine(header[i].At(from), 200);
                }
                if (part.Length > 0 && !parts.Contains(part, StringComparer.OrdinalIgnoreCase))
                    parts.Add(part);
            }
            names[c] = string.Join(' ', parts);
        }
        return names;
    }

    private static int Median(IEnumerable<int> counts)
    {
        var sorted = counts.Order().ToArray();
        return sorted[sorted.Length / 2];
    }
}
