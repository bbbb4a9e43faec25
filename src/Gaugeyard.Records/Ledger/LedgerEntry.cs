using System.Text.Json;

namespace Gaugeyard.Records.Ledger;

/// <summary>What can be done to a run set.</summary>
public static class LedgerKinds
{
    public const string Import = "import", Append = "append", Column = "column", Correction = "correction",
        SetAside = "set aside", PutBack = "put back", Fill = "fill", Restore = "restore", Merge = "merge";
}

/// <summary>One entry of the append-only account of a run set: one per revision.</summary>
/// <param name="Fingerprint">Hash over the revision's content and the previous entry's fingerprint, so that a changed past shows.</param>
public sealed record LedgerEntry(int Revision, DateTimeOffset At, string By, string Kind, string Note, JsonElement? Settings, string Fingerprint);

/// <summary>The one place where a write asks who is writing.</summary>
public interface ICurrentUser
{
    /// <summary>Name for the ledger.</summary>
    string Name { get; }
}
