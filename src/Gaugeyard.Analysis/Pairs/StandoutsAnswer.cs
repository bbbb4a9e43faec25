using System.Text.Json.Serialization;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>Which records, and which vehicles, lie off the trend of the others, and why.</summary>
public sealed record StandoutsAnswer : Answer
{
    /// <summary>Records that stand off, farthest first; at most <see cref="StandoutsQuestion.MostListed"/> of <see cref="StandingOff"/>.</summary>
    public required IReadOnlyList<StandoutRecord> Records { get; init; }

    /// <summary>Number of records that stand off.</summary>
    public required int StandingOff { get; init; }

    /// <summary>Vehicles whose median run stands off, farthest first; null when no vehicle has several runs.</summary>
    public IReadOnlyList<StandoutVehicle>? Vehicles { get; init; }

    /// <summary>What the stand-outs have in common beyond chance, strongest first.</summary>
    public required IReadOnlyList<StandoutExplanation> Explanations { get; init; }

    /// <summary>Figures of each reading with all records and without those that stand off.</summary>
    public required IReadOnlyList<WithAndWithout> WithAndWithout { get; init; }

    /// <summary>Rank and linear correlation of every pair of readings, by vehicle where vehicles repeat.</summary>
    public required IReadOnlyList<PairCorrelation> Correlations { get; init; }

    /// <summary>The share of the named ones that is expected to be chance, at most.</summary>
    public required double FalseDiscoveryRate { get; init; }

    /// <summary>Distance beyond which a record stands off; null when none does.</summary>
    public double? DistanceCut { get; init; }
}

/// <summary>A record that stands off.</summary>
/// <param name="Label">Its run name, vehicle or number.</param>
/// <param name="Distance">Robust distance: raw minimum covariance determinant with its factors.</param>
/// <param name="P">Chance that a record like the others lies so far.</param>
/// <param name="Cells">Readings that make it stand off, worst first.</param>
public sealed record StandoutRecord(int Record, string Label, double Distance, double P, IReadOnlyList<string> Cells)
{
    /// <summary>The vehicle; null when vehicles are not told apart.</summary>
    public string? Vehicle { get; init; }

    /// <summary>The smallest false-discovery rate at which it would be named.</summary>
    public double Q { get; init; }

    /// <summary>Robust distance by the reweighted estimate.</summary>
    public double ReweightedDistance { get; init; }

    /// <summary>Each cell with what was expected of it.</summary>
    public IReadOnlyList<StandoutCell> Details { get; init; } = [];

    /// <summary>Why, as a sentence.</summary>
    public string Why { get; init; } = "";
}

/// <summary>One reading of a stand-out.</summary>
/// <param name="Expected">What its other readings, and its like, make likely.</param>
/// <param name="Shift">How far off, in robust standard deviations.</param>
/// <param name="Suspicion">A slip of the hand that would explain it; a suspicion only.</param>
/// <param name="WouldBe">The value without that slip.</param>
public sealed record StandoutCell(string Column, double Value, double Expected, double Shift, string? Suspicion, double? WouldBe);

/// <summary>A vehicle whose median run stands off.</summary>
/// <param name="Runs">Its runs in the sample.</param>
/// <param name="RunsStandingOff">How many of them stand off by themselves.</param>
public sealed record StandoutVehicle(string Vehicle, int Runs, int RunsStandingOff, double Distance, double P, double Q, IReadOnlyList<string> Cells)
{
    public IReadOnlyList<StandoutCell> Details { get; init; } = [];

    public string Why { get; init; } = "";

    /// <summary>Record numbers of its runs.</summary>
    public IReadOnlyList<int> Records { get; init; } = [];
}

/// <summary>Something that stand-outs have in common.</summary>
/// <param name="Column">The attribute.</param>
/// <param name="Level">Its value; null for a number.</param>
/// <param name="ShareIn">Share among the stand-outs; null for a number.</param>
/// <param name="ShareOut">Share among the others; null for a number.</param>
/// <param name="P">Adjusted for all attributes that were tried.</param>
public sealed record StandoutExplanation(string Text, string Column, string? Level, double? ShareIn, double? ShareOut, double P)
{
    /// <summary>For a number: how far the stand-outs' median lies from the others', in robust standard deviations of the others.</summary>
    public double? Shift { get; init; }

    /// <summary>What was counted: vehicles or records.</summary>
    public string Counted { get; init; } = "records";

    /// <summary>How many of the stand-outs share it.</summary>
    public int? CountIn { get; init; }

    [JsonIgnore]
    internal string Cause { get; init; } = "";
}

/// <summary>Plain figures of a reading, with and without the stand-outs.</summary>
public sealed record WithAndWithout(string Column, int N, double Mean, double Sd, double Median, int NWithout, double MeanWithout, double SdWithout, double MedianWithout);

/// <summary>Correlation of two readings.</summary>
public sealed record PairCorrelation(string A, string B, double? Rank, double? Linear, int N);
