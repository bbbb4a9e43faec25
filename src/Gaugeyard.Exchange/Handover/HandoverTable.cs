using System.Text.Json;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Handover;

/// <summary>What a column of the handed-over table holds.</summary>
internal enum Holds
{
    Value,
    State,
    Low,
    High,
    RecordState,
    RecordReason,
}

/// <summary>One column of the handed-over table.</summary>
/// <param name="Name">Its heading, distinct.</param>
/// <param name="Holds">What it holds.</param>
/// <param name="Of">Index of the run set's column it belongs to; -1 for the record as a whole.</param>
internal sealed record HandoverColumn(string Name, Holds Holds, int Of);

/// <summary>
/// A revision laid out as a table: every column, and beside each column with filled, corrected or set-aside cells its
/// companions "&lt;name&gt; state", "&lt;name&gt; low", "&lt;name&gt; high", so that no meaning hangs on colour.
/// </summary>
internal sealed class HandoverTable
{
    public const string RecordState = "record state", RecordReason = "record reason";

    public HandoverTable(HandoverContent content)
    {
        Content = content;
        var revision = content.Revision;
        var taken = revision.Definitions.Select(d => d.Name).ToHashSet(StringComparer.Ordinal);
        var columns = new List<HandoverColumn>();
        for (int c = 0; c < revision.Definitions.Count; c++)
        {
            string name = revision.Definitions[c].Name;
            columns.Add(new HandoverColumn(name, Holds.Value, c));
            var marks = revision.MarksOf(name).Values;
            bool filled = marks.Any(m => m.State == CellState.Filled);
            if (filled || marks.Any(m => m.State is CellState.Corrected or CellState.SetAside))
                columns.Add(new HandoverColumn(Free(name + " state", taken), Holds.State, c));
            if (filled)
            {
                columns.Add(new HandoverColumn(Free(name + " low", taken), Holds.Low, c));
                columns.Add(new HandoverColumn(Free(name + " high", taken), Holds.High, c));
            }
        }
        if (revision.SetAside.Count > 0)
        {
            columns.Add(new HandoverColumn(Free(RecordState, taken), Holds.RecordState, -1));
            columns.Add(new HandoverColumn(Free(RecordReason, taken), Holds.RecordReason, -1));
        }
        Columns = columns;
        Values = [.. revision.Definitions.Select(d => revision.Column(d.Name))];
        Marks = [.. revision.Definitions.Select(d => revision.MarksOf(d.Name))];
    }

    public HandoverContent Content { get; }

    public IReadOnlyList<HandoverColumn> Columns { get; }

    /// <summary>The run set's columns.</summary>
    public IReadOnlyList<Column> Values { get; }

    /// <summary>Marks by column, then record.</summary>
    public IReadOnlyList<IReadOnlyDictionary<int, CellMark>> Marks { get; }

    public int Records => Content.Revision.Count;

    public int NumberOf(int row) => Content.Revision.Numbers[row];

    /// <summary>The state of a cell apart from its record's: a set-aside record says so in its own columns.</summary>
    public CellState StateOf(int column, int row) =>
        Marks[column].TryGetValue(NumberOf(row), out var mark) && mark.State != CellState.Measured ? mark.State : Values[column].IsMissing(row) ? CellState.Missing : CellState.Measured;

    /// <summary>The cell of a column that is not <see cref="Holds.Value"/>, as text or number; null when it is empty.</summary>
    public object? CompanionAt(HandoverColumn column, int row)
    {
        int record = NumberOf(row);
        switch (column.Holds)
        {
            case Holds.State:
                return Say(StateOf(column.Of, row));
            case Holds.Low:
            case Holds.High:
                return Marks[column.Of].TryGetValue(record, out var mark) && mark.State == CellState.Filled ? column.Holds == Holds.Low ? mark.Low : mark.High : null;
            case Holds.RecordState:
                return Content.Revision.SetAside.ContainsKey(record) ? Say(CellState.SetAside) : null;
            default:
                return Content.Revision.SetAside.TryGetValue(record, out string? reason) ? reason : null;
        }
    }

    /// <summary>The label of a record: its run name, or its number.</summary>
    public string LabelOf(int row) => Content.Revision.FindRole(ColumnRole.RunName) is { } run ? Content.Revision.Column(run.Name).TextAt(row) ?? "" : "";

    /// <summary>A state or kind or role as the HTTP interface spells it.</summary>
    public static string Say<T>(T value)
        where T : struct, Enum => JsonSerializer.SerializeToElement(value).GetString()!;

    /// <summary>The value of a spelling, or null.</summary>
    public static T? Parse<T>(string text)
        where T : struct, Enum
    {
        foreach (var value in Enum.GetValues<T>())
            if (Say(value) == text)
                return value;
        return null;
    }

    private static string Free(string wanted, HashSet<string> taken)
    {
        string name = wanted;
        for (int k = 2; !taken.Add(name); k++)
            name = $"{wanted} {k}";
        return name;
    }
}
