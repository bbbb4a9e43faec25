namespace Gaugeyard.Statistics.Comparing;

/// <summary>
/// Letters such that two groups share one exactly when they are not told apart (Piepho 2004, J. Computational and Graphical
/// Statistics 13:456-466: insert and absorb).
/// </summary>
public static class LetterDisplay
{
    /// <summary>Letters per group, "a" for the highest mean.</summary>
    /// <param name="means">One per group.</param>
    /// <param name="different">Whether groups i and j are told apart; symmetric.</param>
    public static string[] Of(ReadOnlySpan<double> means, Func<int, int, bool> different)
    {
        int k = means.Length;
        double[] values = means.ToArray();
        int[] order = [.. Enumerable.Range(0, k).OrderByDescending(i => values[i])];
        var columns = new List<HashSet<int>> { new(order) };
        for (int x = 0; x < k; x++)
            for (int y = x + 1; y < k; y++)
            {
                int i = order[x], j = order[y];
                if (!different(i, j))
                    continue;
                foreach (var column in columns.ToArray())
                {
                    if (!column.Contains(i) || !column.Contains(j))
                        continue;
                    columns.Remove(column);
                    foreach (int drop in (ReadOnlySpan<int>)[i, j])
                    {
                        var part = new HashSet<int>(column);
                        part.Remove(drop);
                        // absorbed when another column already holds all of it
                        if (!columns.Any(part.IsSubsetOf))
                        {
                            columns.RemoveAll(c => c.IsSubsetOf(part));
                            columns.Add(part);
                        }
                    }
                }
            }
        int[] place = new int[k];
        for (int r = 0; r < k; r++)
            place[order[r]] = r;
        var sorted = columns.Select(c => c.Select(i => place[i]).Order().ToArray())
            .OrderBy(c => c, Comparer<int[]>.Create((p, q) => p.Zip(q).Select(z => z.First.CompareTo(z.Second)).FirstOrDefault(d => d != 0, p.Length.CompareTo(q.Length)))).ToArray();
        var letters = new string[k];
        Array.Fill(letters, "");
        for (int c = 0; c < sorted.Length; c++)
            foreach (int r in sorted[c])
                letters[order[r]] += Name(c);
        return letters;
    }

    // a .. z, then aa', so that more than 26 columns stay readable
    private static string Name(int column) => column < 26 ? ((char)('a' + column)).ToString() : ((char)('a' + column % 26)).ToString() + new string('\'', column / 26);
}
