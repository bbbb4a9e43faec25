using System.Text.Json.Serialization;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;

namespace Gaugeyard.Records.RunSets;

/// <summary>What to do with a new record whose run name is already there.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<OnRepeat>))]
public enum OnRepeat
{
    [JsonStringEnumMemberName("keep")] Keep,
    [JsonStringEnumMemberName("skip")] Skip,
    [JsonStringEnumMemberName("replace")] Replace,
}

/// <summary>Adds records of a later file to a run set, as a draft of the next revision.</summary>
public static class RunSetGrowth
{
    /// <summary>
    /// Appends records. Columns are matched by name; a column that only one side has is missing on the other; new records get
    /// numbers that were never used before.
    /// </summary>
    /// <param name="content">The revision to grow.</param>
    /// <param name="incoming">The new columns, all of one length.</param>
    /// <param name="incomingMarks">Marks by column and by row number of the new file, from 1.</param>
    /// <param name="highestRecord">The highest record number ever given out in this run set.</param>
    /// <exception cref="EditException">A value does not fit the kind its column has in the run set; nothing was changed.</exception>
    public static RevisionDraft Append(
        RevisionContent content,
        IReadOnlyList<Column> incoming,
        IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> incomingMarks,
        OnRepeat onRepeat,
        int highestRecord)
    {
        int fresh = incoming.Count == 0 ? 0 : incoming[0].Count;
        var findings = new List<Finding>();
        var keep = Enumerable.Range(0, fresh).ToList();
        var replaced = new List<(int Row, int From)>();
        if (onRepeat != OnRepeat.Keep && content.FindRole(ColumnRole.RunName) is { } run && incoming.FirstOrDefault(c => c.Name == run.Name) is { } names)
        {
            var known = new Dictionary<string, int>(StringComparer.Ordinal);
            var column = content.Column(run.Name);
            for (int row = 0; row < column.Count; row++)
                if (column.TextAt(row) is { } name)
                    known[name] = row;
            keep.RemoveAll(i =>
            {
                if (names.TextAt(i) is not { } name || !known.TryGetValue(name, out int row))
                    return false;
                if (onRepeat == OnRepeat.Replace)
                    replaced.Add((row, i));
                return true;
            });
            int repeats = fresh - keep.Count;
            if (repeats > 0)
                findings.Add(new Finding(Severity.Note, run.Name, null, $"{repeats} run names were in the run set already: {(onRepeat == OnRepeat.Skip ? "the new records were left out" : "their records were replaced")}."));
        }

        int first = Math.Max(highestRecord, content.Numbers.Highest) + 1, before = content.Count;
        var numbers = content.Numbers.Append(first, keep.Count);
        var marks = RunSetEdits.Marks(content);
        var columns = new List<Column>();
        foreach (var definition in content.Definitions)
            columns.Add(Merge(content.Column(definition.Name), incoming.FirstOrDefault(c => c.Name == definition.Name), definition));
        foreach (var extra in incoming.Where(c => content.Find(c.Name) is null))
        {
            findings.Add(new Finding(Severity.Note, extra.Name, null, $"Column {extra.Name} is new; the {before} earlier records have no value in it."));
            columns.Add(Merge(null, extra, extra.Definition));
        }
        foreach (var (name, list) in incomingMarks)
        {
            var own = marks.TryGetValue(name, out var known) ? known : marks[name] = [];
            for (int k = 0; k < keep.Count; k++)
                if (list.TryGetValue(keep[k] + 1, out var mark))
                    own[first + k] = mark;
            foreach (var (row, from) in replaced)
            {
                own.Remove(content.Numbers[row]);
                if (list.TryGetValue(from + 1, out var mark))
                    own[content.Numbers[row]] = mark;
            }
        }
        return new RevisionDraft(LedgerKinds.Append, columns, numbers)
        {
            Marks = marks.ToDictionary(m => m.Key, m => (IReadOnlyDictionary<int, CellMark>)m.Value, StringComparer.Ordinal),
            SetAside = content.SetAside,
            Findings = findings,
            Note = $"{keep.Count} records added{(replaced.Count > 0 ? $", {replaced.Count} replaced" : "")}",
        };

        Column Merge(Column? old, Column? added, ColumnDefinition definition)
        {
            if (definition.Kind == ColumnKind.Number)
            {
                var values = new double[before + keep.Count];
                Array.Fill(values, double.NaN);
                (old as NumberColumn)?.Values.CopyTo(values, 0);
                Place((row, i) => values[row] = added!.IsMissing(i) ? double.NaN
                    : added is NumberColumn n ? n.Values[i]
                    : double.TryParse(added.TextAt(i), System.Globalization.NumberStyles.Float, System.Globalization.CultureInfo.InvariantCulture, out double v) && double.IsFinite(v) ? v
                    : throw Unfit(definition, added, i, "a number"));
                return new NumberColumn(definition, values);
            }
            if (definition.Kind == ColumnKind.DateTime)
            {
                var ticks = new long[before + keep.Count];
                Array.Fill(ticks, DateTimeColumn.Missing);
                (old as DateTimeColumn)?.Ticks.CopyTo(ticks, 0);
                Place((row, i) => ticks[row] = added!.IsMissing(i) ? DateTimeColumn.Missing
                    : added is DateTimeColumn d ? d.Ticks[i]
                    : DateTime.TryParse(added.TextAt(i), System.Globalization.CultureInfo.InvariantCulture, System.Globalization.DateTimeStyles.None, out var at) ? at.Ticks
                    : throw Unfit(definition, added, i, "a date"));
                return new DateTimeColumn(definition, ticks);
            }
            var coded = old as CodedColumn;
            var levels = coded?.Levels.ToList() ?? (definition.Kind == ColumnKind.YesNo ? [.. CodedColumn.NoYes] : [.. definition.Levels ?? []]);
            var index = levels.Select((l, i) => (l, i)).ToDictionary(x => x.l, x => x.i, StringComparer.Ordinal);
            bool closed = definition.Kind is ColumnKind.YesNo or ColumnKind.OrderedCategory;
            var codes = new int[before + keep.Count];
            Array.Fill(codes, -1);
            coded?.Codes.CopyTo(codes, 0);
            Place((row, i) =>
            {
                if (added!.TextAt(i) is not { } text)
                {
                    codes[row] = -1;
                    return;
                }
                if (!index.TryGetValue(text, out int code))
                {
                    if (closed)
                        throw Unfit(definition, added, i, $"one of {string.Join(", ", levels)}");
                    index.Add(text, code = levels.Count);
                    levels.Add(text);
                }
                codes[row] = code;
            });
            return new CodedColumn(definition, [.. levels], codes);

            void Place(Action<int, int> put)
            {
                if (added is null)
                    return;
                for (int k = 0; k < keep.Count; k++)
                    put(before + k, keep[k]);
                foreach (var (row, from) in replaced)
                    put(row, from);
            }
        }
    }

    private static EditException Unfit(ColumnDefinition definition, Column added, int i, string wanted) =>
        new($"Row {i + 1} of the new file, column {definition.Name}: '{added.TextAt(i)}' is not {wanted}, which the column holds in this run set. Correct the file, or change the column's kind first; nothing was added.",
            [new Finding(Severity.Error, definition.Name, i + 1, $"'{added.TextAt(i)}' is not {wanted}")]);
}
