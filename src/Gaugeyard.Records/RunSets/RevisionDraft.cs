using System.Text.Json;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Records.RunSets;

/// <summary>
/// Everything the next revision of a run set shall hold, ready to be committed in one transaction. Columns that did not
/// change are passed on as they are; the store recognises them by content.
/// </summary>
/// <param name="Kind">What was done, one of <see cref="Ledger.LedgerKinds"/>.</param>
/// <param name="Columns">All columns of the revision in order.</param>
/// <param name="Numbers">Record numbers by row.</param>
public sealed record RevisionDraft(string Kind, IReadOnlyList<Column> Columns, RecordNumbers Numbers)
{
    /// <summary>A sentence for the ledger.</summary>
    public string Note { get; init; } = "";

    /// <summary>Settings that the ledger keeps, as JSON.</summary>
    public JsonElement? Settings { get; init; }

    /// <summary>Marks by column name, then by record number.</summary>
    public IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> Marks { get; init; } =
        new Dictionary<string, IReadOnlyDictionary<int, CellMark>>();

    /// <summary>Reason by record number, for records set aside as a whole.</summary>
    public IReadOnlyDictionary<int, string> SetAside { get; init; } = new Dictionary<int, string>();

    /// <summary>Findings that come with this revision.</summary>
    public IReadOnlyList<Finding> Findings { get; init; } = [];

    /// <summary>Files that this revision brings in.</summary>
    public IReadOnlyList<IncomingFile> Files { get; init; } = [];
}

/// <summary>A file on its way in: where its bytes wait, and what its user called it (never used as a path).</summary>
public sealed record IncomingFile(string FileName, string WaitingAt);
