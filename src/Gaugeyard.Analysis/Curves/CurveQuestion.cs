using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;

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

    /// <summary>The curve alone, for a quick look.</summary>
    [JsonStringEnumMemberName("none")] None,
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

    /// <summary>Whether scores are wanted although the stiffness is stated.</summary>
    public bool WithScores { get; init; }

    /// <summary>Spans to choose from.</summary>
    public IReadOnlyList<double>? Spans { get; init; }

    /// <summary>Points to read off; an even grid over the tested range by default.</summary>
    public IReadOnlyList<IReadOnlyList<double>>? At { get; init; }

    public BandChoice? Band { get; init; }

    /// <summary>Further places to read off with the same bands (one predictor); an empty list asks for a few round ones.</summary>
    public IReadOnlyList<double>? ReadOff { get; init; }

    /// <summary>Takes the stiffest choice within one standard error of the best instead of the best.</summary>
    public bool OneStandardError { get; init; }

    /// <summary>A category column whose levels get curves of their own beside the common one.</summary>
    public string? By { get; init; }

    public override CurveAnswer Ask(RevisionContent content, WorkContext work)
    {
        Check();
        var sample = Sample.Of(content, this);
        foreach (string column in Against.Prepend(Reading))
            sample.Number(column);
        sample = sample.Complete([Reading, .. Against]);
        if (sample.Count < 3)
            throw new CannotAnswerException($"Only {Say.Count(sample.Count, "record")} {(sample.Count == 1 ? "has" : "have")} both {Reading} and {Say.List(Against)}; a curve needs at least 3.");
        var data = CurveData.Of(sample, this);
        double[][] grid = Points(data.X), readOff = ReadOff is null || Against.Count > 1 ? [] : [.. (ReadOff.Count > 0 ? ReadOff : RoundPlaces(data.Low[0], data.High[0])).Select(x => new[] { x })];
        var result = Fit(data, [.. grid, .. readOff], work);
        var notes = new List<string>(result.Notes);
        if (Unit.IsEconomy(content.Find(Reading)!.Unit))
            notes.Add($"{Reading} is distance per fuel; the curve takes its own numbers. Consumption is the better scale.");
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent.");
        notes.Add("A smoothed curve is flatter than the truth at its peaks and dips. It says nothing outside the tested range.");
        int distinct = data.X[0].Distinct().Count();
        var answer = new CurveAnswer
        {
            Headline = "",
            Basis = sample.Basis(),
            Points = [.. result.Points.Take(grid.Length)],
            ReadOff = ReadOff is null ? null : [.. result.Points.Skip(grid.Length)],
            Smoothing = result.Smoothing,
            StraightLine = result.StraightLine,
            Change = CurveHeadline.Change(result),
            Categories = By is null ? null : CategoryCurves.Of(this, By, sample, work),
            Tested = [.. Against.Select((c, j) => new TestedRange(c, data.Low[j], data.High[j]))],
            DistinctValues = distinct,
            NoShape = distinct < FewestValues && Against.Count == 1 ? $"{Against[0]} has only {Say.Count(distinct, "distinct value")}: too few to tell a shape. From {FewestValues} on a curve says something; until then compare the values as groups." : null,
            Notes = notes,
            Method = result.Method,
            Records = new CurveRecords(data.X[0], data.Y, result.Fitted, [.. Enumerable.Range(0, sample.Count).Select(sample.RecordAt)]),
        };
        return answer with { Headline = answer.NoShape ?? CurveHeadline.Of(this, content.Find(Reading)!.Unit, content.Find(Against[0])!.Unit, data, result) };
    }

    /// <summary>Distinct values of the predictor from which on a shape can be told.</summary>
    private const int FewestValues = 10;

    internal CurveResult Fit(CurveData data, double[][] points, WorkContext work) => Way switch
    {
        CurveWay.LocalRegression => LocalCurves.Of(this, data, points, work),
        CurveWay.SmoothingSpline => SplineCurves.Of(this, data, points, work),
        _ => InterpolatedCurves.Of(this, data, points),
    };

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
        if (Confidence is not (> 0 and < 1))
            throw new QuestionException($"The confidence must lie between 0 and 1, for example 0.95, but is {Confidence}.");
        if (By is not null && (By == Reading || Against.Contains(By)))
            throw new QuestionException($"{By} is already part of the curve and cannot divide it too.");
        if (ReadOff?.Any(v => !double.IsFinite(v)) == true || ReadOff?.Count > 1000)
            throw new QuestionException("Every place to read off must be a finite number, and there may be at most 1000.");
        if (At?.Any(p => p.Any(v => !double.IsFinite(v))) == true)
            throw new QuestionException("Every point must be a finite number.");
        if (At?.Any(p => p.Count != Against.Count) == true)
            throw new QuestionException($"Every point must have {Against.Count} value{(Against.Count == 1 ? "" : "s")}, one for each of {Say.List(Against)}.");
    }

    /// <summary>Spans that are compared.</summary>
    internal IReadOnlyList<double> SpansTried => Spans is { Count: > 0 } ? Spans : UsualSpans;

    private static IEnumerable<double> RoundPlaces(double low, double high)
    {
        double raw = (high - low) / 5;
        if (!(raw > 0))
            yield break;
        double power = Math.Pow(10, Math.Floor(Math.Log10(raw))), unit = raw / power, step = power * (unit < 1.5 ? 1 : unit < 3.5 ? 2 : unit < 7.5 ? 5 : 10);
        for (double k = Math.Ceiling(low / step); k * step <= high; k++)
            yield return Math.Round(k * step, 12);
    }

    internal double[][] Points(double[][] x)
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
}
