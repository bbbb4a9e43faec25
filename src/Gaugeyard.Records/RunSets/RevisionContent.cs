using System.Collections.Concurrent;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Records.RunSets;

/// <summary>
/// One immutable revision of a run set: its columns, marks and set-aside records. Columns are read when first asked for
/// and then kept. Safe to use from any thread.
/// </summary>
public sealed class RevisionContent
{
    private readonly Dictionary<string, int> _index;
    private readonly ConcurrentDictionary<int, Lazy<Column>> _columns = new();
    private readonly Func<int, Column> _read;
    private readonly Dictionary<string, IReadOnlyDictionary<int, CellMark>> _marks;
    private static readonly Dictionary<int, CellMark> NoMarks = [];

    /// <param name="runSetId">The run set.</param>
    /// <param name="revision">Its revision, from 1.</param>
    /// <param name="fingerprint">Hash of everything the revision holds.</param>
    /// <param name="definitions">The columns in order.</param>
    /// <param name="numbers">Record numbers by row.</param>
    /// <param name="read">Reads the column at an index.</param>
    /// <param name="marks">Marks by column name, then by record number.</param>
    /// <param name="setAside">Reason by record number, for records set aside as a whole.</param>
    public RevisionContent(
        string runSetId,
        int revision,
        string fingerprint,
        IReadOnlyList<ColumnDefinition> definitions,
        RecordNumbers numbers,
        Func<int, Column> read,
        IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>>? marks = null,
        IReadOnlyDictionary<int, string>? setAside = null)
    {
        RunSetId = runSetId;
        Revision = revision;
        Fingerprint = fingerprint;
        Definitions = definitions;
        Numbers = numbers;
        _read = read;
        _index = definitions.Select((d, i) => (d.Name, i)).ToDictionary(x => x.Name, x => x.i, StringComparer.Ordinal);
        _marks = marks is null ? [] : new(marks.Where(m => m.Value.Count > 0), StringComparer.Ordinal);
        SetAside = setAside ?? new Dictionary<int, string>();
    }

    /// <summary>A content that is held in memory, for tests and for tables that are not stored yet.</summary>
    public static RevisionContent InMemory(
        IReadOnlyList<Column> columns,
        IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>>? marks = null,
        IReadOnlyDictionary<int, string>? setAside = null,
        string runSetId = "memory",
        int revision = 1,
        string fingerprint = "memory") =>
        new(runSetId, revision, fingerprint, [.. columns.Select(c => c.Definition)],
            RecordNumbers.FromOne(columns.Count == 0 ? 0 : columns[0].Count), i => columns[i], marks, setAside);

    public string RunSetId { get; }

    public int Revision { get; }

    public string Fingerprint { get; }

    /// <summary>Columns in order.</summary>
    public IReadOnlyList<ColumnDefinition> Definitions { get; }

    public RecordNumbers Numbers { get; }

    /// <summary>Number of records, set-aside ones included.</summary>
    public int Count => Numbers.Count;

    /// <summary>Reason by record number, for records set aside as a whole.</summary>
    public IReadOnlyDictionary<int, string> SetAside { get; }

    /// <summary>The definition of a column, or null when there is none of that name.</summary>
    public ColumnDefinition? Find(string name) => _index.TryGetValue(name, out int i) ? Definitions[i] : null;

    /// <summary>The first column of a role, or null.</summary>
    public ColumnDefinition? FindRole(ColumnRole role) => Definitions.FirstOrDefault(d => d.Role == role);

    /// <summary>The values of a column.</summary>
    /// <exception cref="KeyNotFoundException">There is no column of that name.</exception>
    public Column Column(string name)
    {
        if (!_index.TryGetValue(name, out int i))
            throw new KeyNotFoundException($"there is no column called '{name}'");
        return _columns.GetOrAdd(i, k => new Lazy<Column>(() => _read(k))).Value;
    }

    /// <summary>Marks of a column by record number; empty when it has none.</summary>
    public IReadOnlyDictionary<int, CellMark> MarksOf(string name) => _marks.GetValueOrDefault(name, NoMarks);

    /// <summary>All marks by column name.</summary>
    public IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> Marks => _marks;

    /// <summary>The state of one cell.</summary>
    public CellState StateOf(Column column, int row)
    {
        int record = Numbers[row];
        if (SetAside.ContainsKey(record))
            return CellState.SetAside;
        if (MarksOf(column.Name).TryGetValue(record, out var mark))
            return mark.State;
        return column.IsMissing(row) ? CellState.Missing : CellState.Measured;
    }
}
