using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Records.RunSets;

/// <summary>
/// Keeps run sets. Every write is one transaction with its ledger entry; a write that was acknowledged survives a killed
/// process. Reads give immutable revisions.
/// </summary>
public interface IRunSetStore
{
    /// <summary>All run sets that are not in the bin, newest revision first.</summary>
    Task<IReadOnlyList<RunSetInfo>> ListAsync(CancellationToken cancel = default);

    /// <summary>A run set as of a revision (the latest by default); null when there is none.</summary>
    Task<RunSetInfo?> FindAsync(string id, int? revision = null, CancellationToken cancel = default);

    /// <summary>The content of a revision (the latest by default); null when there is none.</summary>
    Task<RevisionContent?> OpenAsync(string id, int? revision = null, CancellationToken cancel = default);

    /// <summary>Makes a run set from its first revision.</summary>
    Task<RunSetInfo> CreateAsync(string name, string note, RevisionDraft draft, WriteOptions? options = null, CancellationToken cancel = default);

    /// <summary>Adds a revision.</summary>
    /// <param name="basedOn">The revision that the draft was made from.</param>
    /// <exception cref="StaleRevisionException">Somebody else wrote in between; nothing was changed.</exception>
    Task<RunSetInfo> CommitAsync(string id, int basedOn, RevisionDraft draft, WriteOptions? options = null, CancellationToken cancel = default);

    /// <summary>The ledger, oldest first.</summary>
    Task<IReadOnlyList<LedgerEntry>> LedgerAsync(string id, CancellationToken cancel = default);

    /// <summary>The uploaded files.</summary>
    Task<IReadOnlyList<SourceFile>> SourcesAsync(string id, CancellationToken cancel = default);

    /// <summary>The bytes of an uploaded file; null when there is none.</summary>
    Task<(SourceFile File, Stream Bytes)?> OpenSourceAsync(string id, int number, CancellationToken cancel = default);

    /// <summary>Puts a run set into the bin, from which it is removed after 30 days.</summary>
    Task<bool> DeleteAsync(string id, CancellationToken cancel = default);

    /// <summary>Takes a run set out of the bin.</summary>
    Task<bool> UndeleteAsync(string id, CancellationToken cancel = default);

    /// <summary>Named slices of a run set.</summary>
    Task<IReadOnlyList<Slice>> SlicesAsync(string id, CancellationToken cancel = default);

    /// <summary>Keeps a named slice; one of the same name is replaced.</summary>
    Task KeepSliceAsync(string id, Slice slice, CancellationToken cancel = default);

    /// <summary>Removes a named slice.</summary>
    Task RemoveSliceAsync(string id, string name, CancellationToken cancel = default);

    /// <summary>What the Brief of a run set shows, in order.</summary>
    Task<IReadOnlyList<Pin>> PinsAsync(string id, CancellationToken cancel = default);

    /// <summary>Pins a result to the Brief.</summary>
    Task<Pin> PinAsync(string id, NewPin pin, CancellationToken cancel = default);

    /// <summary>Takes a result off the Brief.</summary>
    Task UnpinAsync(string id, long pin, CancellationToken cancel = default);

    /// <summary>Moves a pinned result to a place (0-based) on the Brief.</summary>
    Task MovePinAsync(string id, long pin, int place, CancellationToken cancel = default);

    /// <summary>Raised after a commit with the run set's id and new revision, so that other windows can tell their user.</summary>
    event Action<string, int>? Committed;
}

/// <summary>How a write is to be done.</summary>
/// <param name="Idempotency">Key of the client; a repeated key with the same request gets the first answer and nothing is done twice.</param>
public sealed record WriteOptions(string? Idempotency = null, bool Demo = false);

/// <summary>A write that was based on a revision which is no longer the latest.</summary>
public sealed class StaleRevisionException(int expected, int actual)
    : Exception($"The run set is at revision {actual}, but this change was made from revision {expected}. Nothing was changed; load revision {actual} and make the change again.")
{
    public int Expected { get; } = expected;

    public int Actual { get; } = actual;
}

/// <summary>A result to pin: what the Brief shows of it, and the address that shows it again.</summary>
/// <param name="Page">Page name, for example "Groups".</param>
/// <param name="Address">Relative address with its query, which asks the same question again.</param>
/// <param name="Headline">The finding.</param>
/// <param name="Basis">The basis line as text.</param>
public sealed record NewPin(string Page, string Address, string Headline, string Basis)
{
    /// <summary>The picture as SVG text, or null.</summary>
    public string? Picture { get; init; }

    /// <summary>The figures as table: first row is the head.</summary>
    public IReadOnlyList<IReadOnlyList<string>> Figures { get; init; } = [];

    /// <summary>Sentences a reader must know.</summary>
    public IReadOnlyList<string> Notes { get; init; } = [];

    /// <summary>The revision the result was computed from.</summary>
    public int Revision { get; init; }

    /// <summary>Fingerprint of data and settings.</summary>
    public string Fingerprint { get; init; } = "";
}

/// <summary>A pinned result.</summary>
public sealed record Pin(long Id, NewPin Result, string By, DateTimeOffset At);
