namespace Gaugeyard.Exchange.Detection;

/// <summary>Decides between decimal point and decimal comma.</summary>
internal static class DecimalMarks
{
    /// <summary>The mark that the cells of the file's beginning show more often; a point when none shows any.</summary>
    public static char Usual(IReadOnlyList<HeadRow> rows)
    {
        int commas = 0, points = 0;
        foreach (var row in rows)
            foreach (string cell in row.Cells)
                if (cell.Length is > 2 and < 30)
                    switch (NumberText.Shows(cell))
                    {
                        case ',':
                            commas++;
                            break;
                        case '.':
                            points++;
                            break;
                    }
        return commas > points ? ',' : '.';
    }

    /// <summary>The mark of one column: what its own cells show, else the file's usual one.</summary>
    public static char OfColumn(IEnumerable<(string Text, int Count)> cells, char usual)
    {
        long commas = 0, points = 0;
        foreach (var (text, count) in cells)
            switch (NumberText.Shows(text))
            {
                case ',':
                    commas += count;
                    break;
                case '.':
                    points += count;
                    break;
            }
        return commas > points ? ',' : points > commas ? '.' : usual;
    }
}
