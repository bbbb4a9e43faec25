using System.Globalization;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.Units;

namespace Gaugeyard.Records.RunSets;

/// <summary>What is to change about a column; null leaves a property as it is.</summary>
public sealed record ColumnChange
{
    public ColumnKind? Kind { get; init; }

    /// <summary>The unit; an empty text takes the unit away.</summary>
    public string? Unit { get; init; }

    public ColumnRole? Role { get; init; }

    /// <summary>Levels of an ordered category from lowest to highest.</summary>
    public IReadOnlyList<string>? Levels { get; init; }

    /// <summary>Values that stand for missing in this column.</summary>
    public IReadOnlyList<string>? MissingCodes { get; init; }

    /// <summary>Whether a new unit converts the values (true) or only names what they already are (false, the default).</summary>
    public bool Convert { get; init; }
}

/// <summary>Changes what a column is, as a draft of the next revision.</summary>
public static class ColumnChanges
{
    /// <summary>Applies a change to one column.</summary>
    /// <exception cref="EditException">No such column, or values that do not fit the new kind (named in the findings).</exception>
    public static RevisionDraft Apply(RevisionContent content, string name, ColumnChange change)
    {
        int at = RunSetEdits.IndexOf(content, name);
        if (at < 0)
            throw new EditException($"There is no column called '{name}' in this run set.");
        var columns = RunSetEdits.Columns(content);
        var marks = RunSetEdits.Marks(content);
        var before = columns[at];
        var definition = before.Definition;
        var target = definition with
        {
            Kind = change.Kind ?? definition.Kind,
            Role = change.Role ?? definition.Role,
            Unit = change.Unit is null ? definition.Unit : change.Unit.Length == 0 ? null : Unit.Find(change.Unit)?.Code ?? change.Unit,
            MissingCodes = change.MissingCodes ?? definition.MissingCodes,
            Levels = change.Levels ?? definition.Levels,
        };
        var own = marks.GetValueOrDefault(name) ?? [];
        var after = before;
        if (change.MissingCodes is { } codes)
            after = DropCodes(content, after, codes, own);
        after = ConvertKind(content, after, ref target);
        if (change.Convert && target.Unit != definition.Unit)
            (after, own) = ConvertUnit((after as NumberColumn) ?? throw new EditException($"'{name}' does not hold numbers, so its unit cannot be converted."), definition.Unit, target.Unit, own);
        columns[at] = after.With(target);
        marks[name] = own;
        // a run set has one vehicle column, one run name and one distance: the newly named one takes over
        if (change.Role is ColumnRole.Vehicle or ColumnRole.RunName or ColumnRole.Distance)
            for (int i = 0; i < columns.Length; i++)
                if (i != at && columns[i].Definition.Role == change.Role)
                    columns[i] = columns[i].With(columns[i].Definition with { Role = ColumnRole.Attribute });
        return RunSetEdits.Draft(content, LedgerKinds.Column, columns, marks, content.SetAside) with { Note = Describe(name, definition, target, change.Convert) };
    }

    /// <summary>Rows of an economy or consumption column converted into another unit of the same family base; interval ends of filled cells swap where order turns round.</summary>
    private static (Column, Dictionary<int, CellMark>) ConvertUnit(NumberColumn column, string? from, string? to, Dictionary<int, CellMark> marks)
    {
        Func<double, double> convert = Conversion(from, to) ?? throw new EditException($"Values in '{from ?? "no unit"}' cannot be converted into '{to ?? "no unit"}'. Name the unit the values are in first.");
        double[] values = [.. column.Values.Select(convert)];
        int bad = Array.FindIndex(values, double.IsInfinity);
        if (bad >= 0)
            throw new EditException($"Row {bad + 1} is zero, which has no value in '{to}'. Correct it or treat it as missing first.");
        var turned = marks.ToDictionary(m => m.Key, m => m.Value.Low is { } low && m.Value.High is { } high
            ? m.Value with { Low = Math.Min(convert(low), convert(high)), High = Math.Max(convert(low), convert(high)) }
            : m.Value);
        return (new NumberColumn(column.Definition, values), turned);
    }

    /// <summary>How to turn a value of one unit into another; null when they do not measure the same.</summary>
    public static Func<double, double>? Conversion(string? from, string? to)
    {
        var (a, b) = (Unit.Find(from), Unit.Find(to));
        return (a?.Code, b?.Code) switch
        {
            (null, _) or (_, null) => null,
            ("°C", "°F") => x => x * 9 / 5 + 32,
            ("°F", "°C") => x => (x - 32) * 5 / 9,
            _ when a!.Code == b!.Code => x => x,
            _ when a!.BaseCode is null || a.BaseCode != b!.BaseCode => null,
            _ => x => b!.FromBaseValue(a!.ToBaseValue(x)),
        };
    }

    private static Column DropCodes(RevisionContent content, Column column, IReadOnlyList<string> codes, Dictionary<int, CellMark> marks)
    {
        var gone = codes.ToHashSet(StringComparer.Ordinal);
        var numbers = codes.Select(c => double.TryParse(c, NumberStyles.Float, CultureInfo.InvariantCulture, out double v) ? v : double.NaN).Where(v => !double.IsNaN(v)).ToHashSet();
        var missing = new List<int>();
        for (int row = 0; row < column.Count; row++)
            if (column is NumberColumn n ? numbers.Contains(n.Values[row]) : column.TextAt(row) is { } text && gone.Contains(text))
                missing.Add(row);
        foreach (int row in missing)
            marks[content.Numbers[row]] = new CellMark(CellState.Missing) { Original = column.TextAt(row), Reason = "named as a code for missing" };
        var drop = missing.ToHashSet();
        return column switch
        {
            NumberColumn n => new NumberColumn(n.Definition, [.. n.Values.Select((v, row) => drop.Contains(row) ? double.NaN : v)]),
            DateTimeColumn d => new DateTimeColumn(d.Definition, [.. d.Ticks.Select((t, row) => drop.Contains(row) ? DateTimeColumn.Missing : t)]),
            _ => new CodedColumn(column.Definition, ((CodedColumn)column).Levels, [.. ((CodedColumn)column).Codes.Select((c, row) => drop.Contains(row) ? -1 : c)]),
        };
    }

    private static Column ConvertKind(RevisionContent content, Column column, ref ColumnDefinition target)
    {
        if (target.Kind != ColumnKind.OrderedCategory)
            target = target with { Levels = null };
        if (target.Kind != ColumnKind.Number)
            target = target with { Unit = null };
        if (target.Kind == column.Definition.Kind && target.Kind != ColumnKind.OrderedCategory)
            return column;
        var texts = new string?[column.Count];
        for (int row = 0; row < texts.Length; row++)
            texts[row] = column.TextAt(row);
        switch (target.Kind)
        {
            case ColumnKind.Category or ColumnKind.Text:
                return CodedColumn.FromTexts(target, texts);
            case ColumnKind.OrderedCategory:
                string[] present = [.. texts.Where(t => t is not null).Distinct().Order(StringComparer.Ordinal)!];
                var levels = target.Levels ?? present;
                if (present.Except(levels).FirstOrDefault() is { } stray)
                    throw new EditException($"'{stray}' of column {target.Name} is not among the levels {string.Join(", ", levels)}. Name every level from lowest to highest.");
                target = target with { Levels = levels };
                return CodedColumn.FromTexts(target, texts);
            case ColumnKind.YesNo:
                var codes = texts.Select((t, row) => t is null ? -1 : YesNo(t) ?? throw Unfit(content, column, row, t, "yes or no")).ToArray();
                return new CodedColumn(target, CodedColumn.NoYes, codes);
            case ColumnKind.Number:
                return new NumberColumn(target, [.. texts.Select((t, row) => t is null ? double.NaN
                    : double.TryParse(t, NumberStyles.Float, CultureInfo.InvariantCulture, out double v) && double.IsFinite(v) ? v : throw Unfit(content, column, row, t, "a number"))]);
            default:
                return new DateTimeColumn(target, [.. texts.Select((t, row) => t is null ? DateTimeColumn.Missing
                    : DateTime.TryParse(t, CultureInfo.InvariantCulture, DateTimeStyles.None, out var at) ? at.Ticks : throw Unfit(content, column, row, t, "a date"))]);
        }
    }

    private static int? YesNo(string text) => text.Trim().ToLowerInvariant() switch
    {
        "yes" or "y" or "true" or "1" or "on" => 1,
        "no" or "n" or "false" or "0" or "off" => 0,
        _ => null,
    };

    private static EditException Unfit(RevisionContent content, Column column, int row, string text, string wanted) =>
        new($"Record {content.Numbers[row]}, column {column.Name}: '{text}' is not {wanted}. Correct it or name it as a code for missing, then change the kind.",
            [new Finding(Severity.Error, column.Name, content.Numbers[row], $"'{text}' is not {wanted}")]);

    private static string Describe(string name, ColumnDefinition before, ColumnDefinition after, bool convert)
    {
        var parts = new List<string>();
        if (before.Kind != after.Kind)
            parts.Add($"kind {Wire(before.Kind)} to {Wire(after.Kind)}");
        if (before.Role != after.Role)
            parts.Add($"role {Wire(before.Role)} to {Wire(after.Role)}");
        if (before.Unit != after.Unit)
            parts.Add($"unit {before.Unit ?? "none"} to {after.Unit ?? "none"}{(convert ? ", values converted" : "")}");
        if (!before.MissingCodes.SequenceEqual(after.MissingCodes))
            parts.Add($"missing written as {string.Join(", ", after.MissingCodes)}");
        return $"{name}: {(parts.Count == 0 ? "levels ordered" : string.Join("; ", parts))}";
    }

    private static string Wire<T>(T value) => System.Text.Json.JsonSerializer.SerializeToElement(value).GetString()!;
}
