using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Storage.Model;

namespace Gaugeyard.Storage.Stores;

/// <summary>Counts a revision once when it is written, so that lists and pages need not read its columns.</summary>
internal static class Summaries
{
    private const int LevelsShown = 200;

    public static Summary Of(RevisionDraft draft)
    {
        var columns = new ColumnSummary[draft.Columns.Count];
        Parallel.For(0, columns.Length, i => columns[i] = Of(draft, draft.Columns[i]));
        int? vehicles = draft.Columns.FirstOrDefault(c => c.Definition.Role == ColumnRole.Vehicle) is { } vehicle ? Distinct(vehicle) : null;
        return new Summary(draft.Numbers.Count, vehicles, draft.SetAside.Count, columns);
    }

    private static ColumnSummary Of(RevisionDraft draft, Column column)
    {
        int present = column.KnownCount(), filled = 0;
        if (draft.Marks.TryGetValue(column.Name, out var marks))
            filled = marks.Values.Count(m => m.State == CellState.Filled);
        return new ColumnSummary(column.Definition, present - filled, column.Count - present, filled, Levels(column));
    }

    private static string[]? Levels(Column column)
    {
        if (column is not CodedColumn coded || column.Definition.Kind == ColumnKind.Text)
            return null;
        if (column.Definition.Kind is ColumnKind.OrderedCategory or ColumnKind.YesNo)
            return coded.Levels;
        var counts = Counts(coded);
        return [.. Enumerable.Range(0, counts.Length).Where(k => counts[k] > 0).OrderByDescending(k => counts[k]).Take(LevelsShown)
            .Select(k => coded.Levels[k]).Order(StringComparer.Ordinal)];
    }

    private static int[] Counts(CodedColumn column)
    {
        var counts = new int[column.Levels.Length];
        foreach (int code in column.Codes)
            if (code >= 0)
                counts[code]++;
        return counts;
    }

    private static int Distinct(Column column) => column switch
    {
        CodedColumn coded => Counts(coded).Count(n => n > 0),
        NumberColumn number => number.Values.Where(v => !double.IsNaN(v)).Distinct().Count(),
        _ => Enumerable.Range(0, column.Count).Select(column.TextAt).Where(t => t is not null).Distinct().Count(),
    };
}
