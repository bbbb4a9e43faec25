using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange;

/// <summary>A file read whole: typed columns and everything that is to be said about their cells.</summary>
/// <param name="Columns">Columns of equal length in the file's order.</param>
/// <param name="Marks">Marks by column name, then by record number (from 1).</param>
/// <param name="SetAside">Reason by record number, for records that a hand-over had set aside.</param>
/// <param name="Findings">What was noticed, with record numbers and columns.</param>
/// <param name="Reading">How the file was read.</param>
public sealed record ImportedTable(
    IReadOnlyList<Column> Columns,
    IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> Marks,
    IReadOnlyDictionary<int, string> SetAside,
    IReadOnlyList<Finding> Findings,
    ReadPreview Reading)
{
    /// <summary>How the file was read (dialect, rows, codes, columns), for the ledger; given back as choices it reads the same.</summary>
    public required ReadChoices ReadAs { get; init; }

    /// <summary>Number of records.</summary>
    public int Records => Columns.Count == 0 ? 0 : Columns[0].Count;
}
