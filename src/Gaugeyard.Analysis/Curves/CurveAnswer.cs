using System.Text.Json.Serialization;

namespace Gaugeyard.Analysis.Curves;

/// <summary>A curve with what it rests on.</summary>
public sealed record CurveAnswer : Answer
{
    public required IReadOnlyList<CurvePoint> Points { get; init; }

    public required SmoothingFigures Smoothing { get; init; }

    /// <summary>A straight line fitted to the same records (one predictor), for comparison.</summary>
    public StraightLine? StraightLine { get; init; }

    /// <summary>Change of the reading from one end of the points to the other, with its interval (one predictor).</summary>
    public CurveChange? Change { get; init; }

    /// <summary>The further places that were to be read off.</summary>
    public IReadOnlyList<CurvePoint>? ReadOff { get; init; }

    /// <summary>One curve per category where they were asked for apart.</summary>
    public IReadOnlyList<CategoryCurve>? Categories { get; init; }

    /// <summary>Smallest and largest value of each predictor.</summary>
    public required IReadOnlyList<TestedRange> Tested { get; init; }

    /// <summary>Number of distinct values of the first predictor; below 10 a shape cannot be told.</summary>
    public required int DistinctValues { get; init; }

    /// <summary>Why no shape can be told from these records; null where one can.</summary>
    public string? NoShape { get; init; }

    /// <summary>The records behind the curve, for pictures; not part of the HTTP answer, which has the records elsewhere.</summary>
    [JsonIgnore]
    public CurveRecords? Records { get; init; }
}

/// <summary>One point of a curve; everything but the place is null outside the tested range.</summary>
public sealed record CurvePoint(IReadOnlyList<double> At, double? Fitted, double? Se, double? Low, double? High, double? SimultaneousLow, double? SimultaneousHigh);

/// <summary>How stiff the curve is, and how that was chosen.</summary>
public sealed record SmoothingFigures
{
    public double? Span { get; init; }

    public double? Df { get; init; }

    public double? Trace { get; init; }

    /// <summary>Residual scale.</summary>
    public double? S { get; init; }

    public required IReadOnlyList<StiffnessScore> Scores { get; init; }

    /// <summary>The stiffest choice within one standard error of the best.</summary>
    public double? OneStandardError { get; init; }
}

/// <summary>Error of one stiffness, in squared units of the reading (or the criterion's own).</summary>
public sealed record StiffnessScore(double? Span, double? Df, double? Score, double? Se);

/// <summary>Intercept and slope of a straight line, its error on the same parts as the curve's, and the verdict.</summary>
/// <param name="Excess">Mean over vehicles of the line's squared error less the curve's.</param>
/// <param name="ExcessSe">Its standard error.</param>
public sealed record StraightLine(double Intercept, double Slope, double? Score, double? CurveScore, double? Excess, double? ExcessSe)
{
    /// <summary>The line's error on unseen vehicles is larger by more than two standard errors.</summary>
    [JsonIgnore]
    public bool? Misses => Excess is { } e && ExcessSe is { } se ? e > 2 * se : null;
}

/// <summary>Difference of the curve between two places.</summary>
public sealed record CurveChange(double From, double To, double Difference, double? Low, double? High);

/// <summary>The curve of one category, or the reason why there is none.</summary>
public sealed record CategoryCurve(string Level, int Records, int? Vehicles, string? Reason, IReadOnlyList<CurvePoint> Points, SmoothingFigures? Smoothing, CurveChange? Change);

/// <summary>The range within which a predictor was tested.</summary>
public sealed record TestedRange(string Column, double From, double To);

/// <summary>Records of a curve with one predictor or more, row by row.</summary>
/// <param name="X">First predictor.</param>
/// <param name="Y">Reading.</param>
/// <param name="Fitted">Value of the curve at each record.</param>
/// <param name="Numbers">Record numbers.</param>
public sealed record CurveRecords(double[] X, double[] Y, double[] Fitted, int[] Numbers);
