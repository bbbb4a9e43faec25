using Gaugeyard.Records.Columns;

namespace Gaugeyard.Records.RunSets;

/// <summary>A column with its counts in one revision.</summary>
/// <param name="Known">Records with a measured or corrected value.</param>
/// <param name="Missing">Records without a value.</param>
/// <param name="Filled">Records whose value is an estimate.</param>
/// <param name="Levels">Levels of a category, at most the 200 most frequent; null for other kinds.</param>
public sealed record ColumnSummary(ColumnDefinition Definition, int Known, int Missing, int Filled, IReadOnlyList<string>? Levels);

/// <summary>A run set as of one revision, without its values.</summary>
/// <param name="HighestRecord">The highest record number ever given out, over all revisions.</param>
public sealed record RunSetInfo(
    string Id,
    string Name,
    string Note,
    int Revision,
    DateTimeOffset RevisedAt,
    int Records,
    int? Vehicles,
    int SetAside,
    IReadOnlyList<ColumnSummary> Columns,
    IReadOnlyList<Finding> Findings,
    int Sources,
    bool Demo,
    int HighestRecord);

/// <summary>A file that was uploaded, kept byte for byte.</summary>
/// <param name="Number">From 1 in order of upload.</param>
/// <param name="Hash">SHA-256 in lower-case hex.</param>
public sealed record SourceFile(int Number, string FileName, long Bytes, string Hash, int Revision);
