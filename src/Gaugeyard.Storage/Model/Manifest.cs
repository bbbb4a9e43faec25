using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Storage.Model;

/// <summary>What a revision consists of, by reference.</summary>
/// <param name="Columns">Definition and chunk list of each column in order.</param>
/// <param name="Numbers">Runs of record numbers: first, count.</param>
/// <param name="Marks">Chunk that holds the marks of a column, by column name.</param>
/// <param name="SetAside">Chunk that holds the set-aside records, or null.</param>
/// <param name="Findings">Chunk that holds the findings so far, or null.</param>
internal sealed record Manifest(
    IReadOnlyList<ManifestColumn> Columns,
    IReadOnlyList<int[]> Numbers,
    IReadOnlyDictionary<string, long> Marks,
    long? SetAside,
    long? Findings);

internal sealed record ManifestColumn(ColumnDefinition Definition, long List);

/// <summary>Counts of a revision.</summary>
internal sealed record Summary(int Records, int? Vehicles, int SetAside, IReadOnlyList<ColumnSummary> Columns);

/// <summary>One finding or mark list as stored.</summary>
internal sealed record StoredFindings(IReadOnlyList<Finding> Findings);
