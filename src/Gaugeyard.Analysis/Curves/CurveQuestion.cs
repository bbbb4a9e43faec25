using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Influences;
using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

[JsonConverter(typeof(JsonStringEnumConverter<CurveWay>))]
public enum CurveWay
{
    [JsonStringEnumMemberName("local-regression")] LocalRegression,
    [JsonStringEnumMemberName("smoothing-spline")] SmoothingSpline,
    [JsonStringEnumMemberName("natural-cubic")] NaturalCubic,
    [JsonStringEnumMemberName("monotone-cubic")] MonotoneCubic,
    [JsonStringEnumMemberName("akima")] Akima,
}

[JsonConverter(typeof(JsonStringEnumConverter<ChooseBy>))]
public enum ChooseBy
{
    [JsonStringEnumMemberName("k-fold")] KFold,
    [JsonStringEnumMemberName("leave-one-out")] LeaveOneOut,
    [JsonStringEnumMemberName("gcv")] Gcv,
    [JsonStringEnumMemberName("aicc")] Aicc,
}

[JsonConverter(typeof(JsonStringEnumConverter<BandKind>))]
public enum BandKind
{
    [JsonStringEnumMemberName("formula")] Formula,
    [JsonStringEnumMemberName("bootstrap")] Bootstrap,
}

[JsonConverter(typeof(JsonStringEnumConverter<ResampleBy>))]
public enum ResampleBy
{
    [JsonStringEnumMemberName("vehicle")] Vehicle,
    [JsonStringEnumMemberName("record")] Record,
    [JsonStringEnumMemberName("residual")] Residual,
    [JsonStringEnumMemberName("wild")] Wild,
}

/// <summary>Which band to draw about a curve.</summary>
public sealed record BandChoice
{
    public BandKind Kind { get; init; }

    /// <summary>What is resampled; vehicles where they are told apart, else records.</summary>
    public ResampleBy? Resample { get; init; }

    /// <summary>Number of resamples.</summary>
    public int Times { get; init; } = 1000;
}

/// <summary>What shape has the relation of a reading to one or more numbers?</summary>
public sealed record CurveQuestion : Question<CurveAnswer>
{
    private static readonly double[] UsualSpans = [0.2, 0.25, 0.3, 0.4, 0.5, 0.6, 0.75, 0.9, 1];

    public string Reading { get; init; } = "";

    /// <summary>One to four number columns.</summary>
    public IReadOnlyList<string> Against { get; init; } = [];

    public CurveWay Way { get; init; }

    public int? Degree { get; init; }

    public bool Robust { get; init; }

    public double? Span { get; init; }

    public double? Df { get; init; }

    /// <summary>How the stiffness is chosen when it is not stated.</summary>
    public ChooseBy? Choose { get; init; }

    /// <summary>Spans to choose from.</summary>
    public IReadOnlyList<double>? Spans { get; init; }

    /// <summary>Points to read off; an even grid over the tested range by default.</summary>
    public IReadOnlyList<IReadOnlyList<double>>? At { get; init; }

    public BandChoice? Band { get; init; }

    public override CurveAnswer Ask(RevisionContent content, WorkContext work)
    {
        Check();
        var sample = Sample.Of(content, this);
        foreach (string column in Against.Prepend(Reading))
            sample.Number(column);
        sample = sample.Complete([Reading, .. Against]);
        if (sample.Count < 3)
            throw new CannotAnswerException($"Only {Say.Count(sample.Count, "record")} {(sample.Count == 1 ? "has" : "have")} both {Reading} and {Say.List(Against)}; a curve needs at least 3.");
        double[] y = sample.Number(Reading);
        double[][] x = [.. Against.Select(sample.Number)];
        var points = Points(x);
        var data = new CurveData(sample, x, y);
        var result = Way switch
        {
            CurveWay.LocalRegression => LocalCurves.Of(this, data, points, work),
            CurveWay.SmoothingSpline => SplineCurves.Of(this, data, points, work),
            _ => Interpolated(data, points),
        };
        var notes = new List<string>(result.Notes);
        if (Unit.IsEconomy(content.Find(Reading)!.Unit))
            notes.Add($"{Reading} is distance per fuel; the curve takes its own numbers. Consumption is the better scale.");
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent.");
        notes.Add("A smoothed curve is flatter than the truth at its peaks and dips. It says nothing outside the tested range.");
        return new CurveAnswer
        {
            Headline = CurveHeadline.Of(this, content.Find(Reading)!.Unit, content.Find(Against[0])!.Unit, data, result),
            Basis = sample.Basis(),
            Points = result.Points,
            Smoothing = result.Smoothing,
            StraightLine = result.StraightLine,
            Notes = notes,
            Method = result.Method,
        };
    }

    private void Check()
    {
        if (Against.Count is < 1 or > 4)
            throw new QuestionException($"Name one to four columns to set {Reading} against, not {Against.Count}.");
        if (Against.Contains(Reading))
            throw new QuestionException($"{Reading} cannot be set against itself.");
        if (Against.Distinct().Count() < Against.Count)
            throw new QuestionException("A column is named twice.");
        if (Degree is < 0 or > 2)
            throw new QuestionException($"The degree must be 0, 1 or 2 but is {Degree}.");
        if (Span is <= 0 or > 10)
            throw new QuestionException($"The span must lie above 0 and at most 10 but is {Span}.");
        if (Spans?.Any(s => s is <= 0 or > 10) == true)
            throw new QuestionException("Every span must lie above 0 and at most 10.");
        if (Way != CurveWay.LocalRegression && Against.Count > 1)
            throw new QuestionException("Only local regression takes more than one predictor.");
        if (Band?.Times is < 50 or > 20_000)
            throw new QuestionException($"The number of resamples must lie between 50 and 20000 but is {Band.Times}.");
        if (At?.Any(p => p.Count != Against.Count) == true)
            throw new QuestionException($"Every point must have {Against.Count} value{(Against.Count == 1 ? "" : "s")}, one for each of {Say.List(Against)}.");
    }

    /// <summary>Spans that are compared.</summary>
    internal IReadOnlyList<double> SpansTried => Spans is { Count: > 0 } ? Spans : UsualSpans;

    private double[][] Points(double[][] x)
    {
        if (At is not null)
            return [.. At.Select(p => p.ToArray())];
        if (x.Length == 1)
        {
            double low = x[0].Min(), high = x[0].Max();
            return [.. Enumerable.Range(0, 100).Select(i => new[] { i == 99 ? high : low + (high - low) * i / 99 })];
        }
        // with several predictors: along the first, the others at their medians
        double[] medians = [.. x.Select(c => Statistics.Describing.Quantiles.Median(c))];
        double from = x[0].Min(), to = x[0].Max();
        return [.. Enumerable.Range(0, 50).Select(i => (double[])[from + (to - from) * i / 49, .. medians[1..]])];
    }

    private CurveResult Interpolated(CurveData data, double[][] points)
    {
        if (Band is not null)
            throw new QuestionException("A curve through every point has no band. Take local regression or a smoothing spline.");
        var kind = Way switch { CurveWay.NaturalCubic => InterpolantKind.NaturalCubic, CurveWay.MonotoneCubic => InterpolantKind.MonotoneCubic, _ => InterpolantKind.Akima };
        var (curve, reason) = Interpolants.Of(data.X[0], data.Y, kind);
        if (curve is null)
            throw new CannotAnswerException(Say.Sentence(reason!) + ".");
        int ties = data.Y.Length - data.X[0].Distinct().Count();
        return new CurveResult(
            [.. points.Select(p => new CurvePoint(p, data.Inside(p) ? curve.Evaluate(p[0]) : null, null, null, null, null, null))],
            new SmoothingFigures { Trace = data.Y.Length - ties, Scores = [] },
            null,
            ties > 0 ? [$"{Say.Count(ties, "record")} share their place with another and were averaged. A curve through every point follows the noise too."] : ["A curve through every point follows the noise too."],
            [kind switch { InterpolantKind.NaturalCubic => "Natural cubic spline through the points.", InterpolantKind.MonotoneCubic => "Shape-preserving cubic through the points (Fritsch and Carlson 1980).", _ => "Akima's cubic through the points (1970)." }]);
    }
}

/// <summary>A curve with what it rests on.</summary>
public sealed record CurveAnswer : Answer
{
    public required IReadOnlyList<CurvePoint> Points { get; init; }

    public required SmoothingFigures Smoothing { get; init; }

    /// <summary>A straight line fitted to the same records (one predictor), for comparison.</summary>
    public StraightLine? StraightLine { get; init; }
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

public sealed record StiffnessScore(double? Span, double? Df, double? Score, double? Se);

/// <summary>Intercept and slope of a straight line, and its error on the same folds as the curve's.</summary>
public sealed record StraightLine(double Intercept, double Slope, double? Score, double? CurveScore);

/// <summary>The records of a curve as arrays.</summary>
internal sealed class CurveData(Sample sample, double[][] x, double[] y)
{
    public Sample Sample { get; } = sample;

    public double[][] X { get; } = x;

    public double[] Y { get; } = y;

    /// <summary>Unit of resampling and folds: the vehicle, or the record where vehicles are not told apart.</summary>
    public int[] Units { get; } = sample.VehicleOf ?? [.. Enumerable.Range(0, y.Length)];

    public int UnitCount { get; } = sample.VehicleCount ?? y.Length;

    /// <summary>Whether a point lies within the tested range of every predictor.</summary>
    public bool Inside(double[] at)
    {
        for (int j = 0; j < X.Length; j++)
            if (at[j] < X[j].Min() || at[j] > X[j].Max())
                return false;
        return true;
    }

    /// <summary>Mean over vehicles of each vehicle's mean squared error, with its standard error.</summary>
    public (double Score, double Se) Score(double[] predicted)
    {
        var sums = new double[UnitCount];
        var counts = new int[UnitCount];
        for (int i = 0; i < Y.Length; i++)
        {
            if (double.IsNaN(predicted[i]))
                continue;
            sums[Units[i]] += (Y[i] - predicted[i]) * (Y[i] - predicted[i]);
            counts[Units[i]]++;
        }
        double[] each = [.. Enumerable.Range(0, UnitCount).Where(u => counts[u] > 0).Select(u => sums[u] / counts[u])];
        var m = Statistics.Describing.Moments.Of(each);
        return (each.Length == 0 ? double.NaN : m.Mean, m.StandardDeviation / Math.Sqrt(each.Length));
    }
}

internal sealed record CurveResult(IReadOnlyList<CurvePoint> Points, SmoothingFigures Smoothing, StraightLine? StraightLine, IReadOnlyList<string> Notes, IReadOnlyList<string> Method);
