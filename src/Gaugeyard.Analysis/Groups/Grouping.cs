using Gaugeyard.Analysis.Sampling;

namespace Gaugeyard.Analysis.Groups;

/// <summary>The records of a sample by the levels of some columns, groups in the order of their levels, a missing level last.</summary>
internal sealed record Grouping(IReadOnlyList<(IReadOnlyDictionary<string, string?> Key, int[] Rows)> Groups, int Dropped, int DroppedRecords)
{
    public static Grouping Of(Sample sample, IReadOnlyList<string> by, int most)
    {
        if (by.Count == 0)
            return new Grouping([(new Dictionary<string, string?>(), [.. Enumerable.Range(0, sample.Count)])], 0, 0);
        var columns = by.Select(sample.Category).ToArray();
        var groups = new SortedDictionary<long, List<int>>();
        for (int i = 0; i < sample.Count; i++)
        {
            long key = 0;
            foreach (var (codes, levels) in columns)
                key = key * (levels.Length + 1) + (codes[i] < 0 ? levels.Length : codes[i]);
            if (!groups.TryGetValue(key, out var rows))
                groups[key] = rows = [];
            rows.Add(i);
        }
        var kept = groups.Count <= most ? groups.Keys.ToHashSet() : [.. groups.OrderByDescending(g => g.Value.Count).Take(most).Select(g => g.Key)];
        var list = new List<(IReadOnlyDictionary<string, string?>, int[])>();
        foreach (var (key, rows) in groups.Where(g => kept.Contains(g.Key)))
        {
            var labels = new Dictionary<string, string?>();
            long rest = key;
            for (int c = by.Count - 1; c >= 0; c--)
            {
                int level = (int)(rest % (columns[c].Levels.Length + 1));
                rest /= columns[c].Levels.Length + 1;
                labels[by[c]] = level == columns[c].Levels.Length ? null : columns[c].Levels[level];
            }
            list.Add((by.ToDictionary(b => b, b => labels[b]), [.. rows]));
        }
        return new Grouping(list, groups.Count - kept.Count, sample.Count - list.Sum(g => g.Item2.Length));
    }
}
