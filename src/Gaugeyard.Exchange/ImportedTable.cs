using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange;

/// <summary>A file as typed columns, with everything that was noticed on the way.</summary>
/// <param name="Columns">Columns in file order, all of one length; definitions carry kind, role, unit and levels.</param>
/// <param name="Marks">Marks by column name, then by record number (1-based in file order).</param>
/// <param name="SetAside">Reason by record number, for records a hand-over file marked as set aside.</param>
/// <param name="Findings">What was noticed, file-wide first.</param>
public sealed record ImportedTable(
    IReadOnlyList<Column> Columns,
    IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> Marks,
    IReadOnlyDictionary<int, string> SetAside,
    IReadOnlyList<Finding> Findings)
{
    /// <summary>How the file was read (dialect, rows, codes), for the ledger: plain data that serializes to JSON.</summary>
    public required ReadChoices ReadAs { get; init; }
}
