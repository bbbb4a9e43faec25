using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Handover;

/// <summary>Everything a hand-over tells: the revision, its run set and its ledger up to that revision.</summary>
public sealed record HandoverContent(RunSetInfo RunSet, RevisionContent Revision, IReadOnlyList<LedgerEntry> Ledger);
