using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Analysis;

/// <summary>What one unit of the estimand is.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<CountBy>))]
public enum CountBy
{
    [JsonStringEnumMemberName("vehicle")] Vehicle,
    [JsonStringEnumMemberName("run")] Run,
}

/// <summary>Whether records that share a vehicle belong together.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<VehicleUse>))]
public enum VehicleUse
{
    [JsonStringEnumMemberName("as-recorded")] AsRecorded,
    [JsonStringEnumMemberName("ignore")] Ignore,
}

/// <summary>
/// A question of the trade about one run set: what to look at, on which records, with which settings. Questions are plain
/// data, so that a page, the HTTP interface and a job all ask the same thing; the answer is a pure function of the question
/// and the revision.
/// </summary>
public abstract record Question
{
    /// <summary>The revision asked about; the latest by default.</summary>
    public int? Revision { get; init; }

    /// <summary>Which records; all by default.</summary>
    public IReadOnlyList<SliceCondition> Slice { get; init; } = [];

    /// <summary>Seed of everything random in the answer.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Each vehicle once, or every run; null lets the procedure take its default.</summary>
    public CountBy? Count { get; init; }

    /// <summary>Whether the vehicle column is used.</summary>
    public VehicleUse Vehicles { get; init; }

    /// <summary>Whether filled cells take part; measured only by default.</summary>
    public bool WithFilled { get; init; }

    /// <summary>Confidence of intervals, in (0, 1).</summary>
    public double Confidence { get; init; } = 0.95;
}

/// <summary>A question with the procedure that answers it.</summary>
public abstract record Question<TAnswer> : Question
    where TAnswer : Answer
{
    /// <summary>Answers from one revision. Synchronous and free of side effects.</summary>
    /// <exception cref="QuestionException">The question itself is wrong: no such column, a setting out of range.</exception>
    /// <exception cref="CannotAnswerException">The data cannot carry an answer; the message says why and what would help.</exception>
    /// <exception cref="OperationCanceledException">Somebody stopped it.</exception>
    public abstract TAnswer Ask(RevisionContent content, WorkContext work);
}

/// <summary>A number of records left out, and why.</summary>
public sealed record LeftOut(string Reason, int Count);

/// <summary>What an answer rests on.</summary>
/// <param name="Records">Records used.</param>
/// <param name="Vehicles">Vehicles they belong to; null when vehicles are not told apart.</param>
/// <param name="Fingerprint">Hash of revision and question: enough to compute the answer again.</param>
public sealed record Basis(int Revision, int Records, int? Vehicles, IReadOnlyList<LeftOut> LeftOut, ulong Seed, string Fingerprint);

/// <summary>What every answer carries. Property names are those of the HTTP interface in camelCase.</summary>
public abstract record Answer
{
    /// <summary>The finding as a manager would repeat it: at most two sentences.</summary>
    [JsonPropertyOrder(-3)]
    public required string Headline { get; init; }

    /// <summary>What it rests on.</summary>
    [JsonPropertyOrder(100)]
    public required Basis Basis { get; init; }

    /// <summary>Sentences a user must know.</summary>
    [JsonPropertyOrder(101)]
    public IReadOnlyList<string> Notes { get; init; } = [];

    /// <summary>How it was computed, in full sentences; shown closed under "Method and cautions".</summary>
    [JsonPropertyOrder(102)]
    public IReadOnlyList<string> Method { get; init; } = [];
}

/// <summary>The question itself is wrong; the message is a sentence that says what and what to do.</summary>
public sealed class QuestionException(string message) : Exception(message);

/// <summary>The data cannot carry an answer; the message says why and what would help.</summary>
public sealed class CannotAnswerException(string message) : Exception(message);
