using System.Globalization;
using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Curves;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Portal.Components;
using Gaugeyard.Portal.Plots;
using Gaugeyard.Records.Columns;
using Microsoft.AspNetCore.Components;

namespace Gaugeyard.Portal.Pages;

/// <summary>What shape has the relation of a reading to a number? Settings live in the address.</summary>
public sealed partial class CurvesPage
{
    private const string LocalWay = "local-regression", SplineWay = "smoothing-spline";
    private static readonly (string, string)[] Ways = [(LocalWay, "local regression"), (SplineWay, "a smoothing spline"), ("natural-cubic", "a natural cubic through every point"), ("monotone-cubic", "a shape-preserving cubic through every point"), ("akima", "Akima's cubic through every point")];
    private static readonly (string, string)[] Degrees = [("0", "level"), ("1", "straight"), ("2", "bent")];
    private static readonly (string, string)[] Robusts = [("no", "taken as they are"), ("yes", "weighed down")];
    private static readonly (string, string)[] Confidences = [("0.9", "90 %"), ("0.95", "95 %"), ("0.99", "99 %")];
    private static readonly (string, string)[] Filleds = [("no", "left out"), ("with", "taken in")];
    private static readonly (string, string)[] VehicleUses = [("as-recorded", "belong together"), ("ignore", "each stand alone")];
    private Asking<CurveAnswer> _curve = null!, _quick = null!;
    private double? _dragged;
    private CurveAnswer? _dotsOf, _residualsOf;
    private IReadOnlyList<(double X, double Y)> _dots = [];
    private IReadOnlyList<ScatterPlot.Dot> _residuals = [];

    private string Reading => Known(Desk.Value("reading")) ?? FirstReading ?? "";

    private IReadOnlyList<string> Against => [First, .. (Way == LocalWay ? Desk.Values("with") ?? [] : []).Where(c => c != First && c != Reading && Known(c) is not null).Take(3)];

    // temperature is the usual suspect; else the first attribute
    private string First => Known(Desk.Value("against")) is { } chosen && chosen != Reading ? chosen
        : (RunSet!.Columns.FirstOrDefault(c => Candidate(c.Definition) && UnitOf(c.Definition.Name) is "°C" or "°F" or "K") ?? RunSet.Columns.FirstOrDefault(c => Candidate(c.Definition) && c.Definition.Role != ColumnRole.Reading) ?? RunSet.Columns.First(c => Candidate(c.Definition))).Definition.Name;

    private string? By => Desk.Value("by") is { Length: > 0 } by && GroupColumns.Any(c => c.Value == by) ? by : null;

    private string Way => Ways.Any(w => w.Item1 == Desk.Value("way")) ? Desk.Value("way")! : LocalWay;

    /// <summary>Whether the way has a stiffness and a band.</summary>
    private bool Chooses => Way is LocalWay or SplineWay;

    private bool VehiclesCount => RunSet?.Vehicles is not null && Desk.Value("vehicles") != "ignore";

    private string Choice => Stated is not null ? "stated" : Desk.Value("choose").OrElse("k-fold");

    private double? Stated => Way == LocalWay ? Number("span") : Number("df");

    private string BandBy => Desk.Value("band").OrElse("resample");

    private double Times => Number("times") ?? 1000;

    private double Seed => Number("seed") ?? 1;

    private double Confidence => Number("confidence") ?? 0.95;

    private IEnumerable<(string, string)> OtherColumns => NumberColumns.Where(c => c.Value != Reading);

    private IEnumerable<(string, string)> FurtherColumns => NumberColumns.Where(c => c.Value != Reading && c.Value != Against[0]);

    private IEnumerable<(string, string)> Groupings => [("", VehiclesCount ? "all vehicles together" : "all records together"), .. GroupColumns.Where(c => RunSet!.Columns.First(r => r.Definition.Name == c.Value).Definition.Role != ColumnRole.Vehicle).Select(c => (c.Value, "each " + c.Text))];

    private IEnumerable<(string, string)> Choices =>
    [
        ("k-fold", VehiclesCount ? "unseen vehicles ask for" : "unseen records ask for"), ("one-error", "possible without losing more than chance"), ("leave-one-out", "leaving out each run asks for"), ("gcv", "generalised cross-validation asks for"),
        ("aicc", "the corrected Akaike criterion asks for"), .. Stated is { } s ? [("stated", $"I say ({(Way == LocalWay ? "span" : "df")} {Say.Number(s, 2)})")] : Array.Empty<(string, string)>(),
    ];

    private IEnumerable<(string, string)> Bands =>
    [
        ("resample", VehiclesCount ? "vehicles drawn anew" : "records drawn anew"), ("wild", "residuals turned at random"), .. VehiclesCount ? Array.Empty<(string, string)>() : [("residual", "residuals drawn anew")], ("formula", "the formula"),
    ];

    /// <summary>What is drawn: the quick curve while the slider moves.</summary>
    private CurveAnswer? InFront => _dragged is not null && _quick.Answer is { } quick ? quick : _curve.Answer;

    private IReadOnlyList<(double X, double Y)> Shown => InFront is { NoShape: null } a ? [.. a.Points.Where(p => p.Fitted is not null).Select(p => (p.At[0], p.Fitted!.Value))] : [];

    private IReadOnlyList<(double X, double Y)> Dots
    {
        get
        {
            if (!ReferenceEquals(_dotsOf, _curve.Answer))
                (_dotsOf, _dots) = (_curve.Answer, _curve.Answer?.Records is { } r ? [.. r.X.Zip(r.Y)] : []);
            return _dots;
        }
    }

    private IReadOnlyList<ScatterPlot.Dot> Residuals
    {
        get
        {
            if (!ReferenceEquals(_residualsOf, InFront))
                (_residualsOf, _residuals) = (InFront, InFront?.Records is { } r ? [.. r.X.Select((x, i) => new ScatterPlot.Dot(x, r.Y[i] - r.Fitted[i], false, $"record {r.Numbers[i]}")).Where(d => double.IsFinite(d.Y))] : []);
            return _residuals;
        }
    }

    protected override void OnInitialized()
    {
        base.OnInitialized();
        (_curve, _quick) = (Question<CurveAnswer>(), Question<CurveAnswer>());
    }

    protected override async Task AskAsync()
    {
        if (NumberColumns.Count < 2)
            return;
        await _curve.AskAsync(Id, Current(), RunSet!.Revision);
        _dragged = null;
    }

    private CurveQuestion Current()
    {
        string choice = Choice;
        return new CurveQuestion
        {
            Reading = Reading,
            Against = Against,
            By = By,
            Way = Parsed<CurveWay>(Way),
            Degree = Way == LocalWay ? (int?)Number("degree") : null,
            Robust = Way == LocalWay && Desk.Value("robust") == "yes",
            Span = Way == LocalWay ? Stated : null,
            Df = Way == SplineWay ? Stated : null,
            Choose = !Chooses ? null : choice is "stated" or "one-error" ? ChooseBy.KFold : Parsed<ChooseBy>(choice),
            OneStandardError = choice == "one-error",
            WithScores = Chooses,
            ReadOff = Against.Count == 1 ? Places : null,
            Band = !Chooses ? null : new BandChoice
            {
                Kind = BandBy == "formula" ? BandKind.Formula : BandKind.Bootstrap,
                Resample = BandBy switch { "wild" => ResampleBy.Wild, "residual" => ResampleBy.Residual, _ => null },
                Times = (int)Math.Clamp(Times, 50, 20_000),
            },
            Slice = Desk.Slice,
            Seed = (ulong)Math.Max(0, Seed),
            Confidence = Confidence is > 0 and < 1 ? Confidence : 0.95,
            WithFilled = Desk.Value("filled") == "with",
            Vehicles = VehiclesCount || RunSet?.Vehicles is null ? VehicleUse.AsRecorded : VehicleUse.Ignore,
        };
    }

    // round places, and those the user added
    private IReadOnlyList<double> Places => Desk.Values("at") is { } texts ? [.. texts.Select(t => double.TryParse(t, NumberStyles.Float, CultureInfo.InvariantCulture, out double v) ? v : double.NaN).Where(double.IsFinite).Take(50)] : [];

    private void ReadOffAt(double? place)
    {
        if (place is not { } at)
            return;
        IEnumerable<double> places = Places.Count > 0 ? Places : _curve.Answer?.ReadOff?.Select(p => p.At[0]) ?? [];
        Desk.Set(("at", string.Join('|', places.Append(at).Distinct().Order().Select(v => v.ToString("R", CultureInfo.InvariantCulture)))));
    }

    private void Choose(string choice)
    {
        if (choice != "stated")
            Desk.Set(("choose", choice), ("span", null), ("df", null));
    }

    // the slider: even steps on a log scale, from stiff to loose
    private (double Stiff, double Loose) Ends(CurveAnswer answer)
    {
        if (Way == LocalWay)
            return (1.5, Math.Min(0.6, Math.Max(0.05, 12.0 / answer.Basis.Records)));
        return (2.2, Math.Max(3, Math.Min(40, answer.DistinctValues - 1)));
    }

    private double FromSlider(CurveAnswer answer, double position)
    {
        var (stiff, loose) = Ends(answer);
        return Math.Round(Math.Exp(Math.Log(stiff) + position / 100 * (Math.Log(loose) - Math.Log(stiff))), Way == LocalWay ? 3 : 2);
    }

    private string SliderAt(CurveAnswer answer)
    {
        var (stiff, loose) = Ends(answer);
        double at = _dragged ?? answer.Smoothing.Span ?? answer.Smoothing.Df ?? stiff;
        return Math.Round(Math.Clamp(100 * Math.Log(at / stiff) / Math.Log(loose / stiff), 0, 100)).ToString(CultureInfo.InvariantCulture);
    }

    private string SliderText(CurveAnswer answer) =>
        Way == LocalWay ? $"span {Say.Number(_dragged ?? answer.Smoothing.Span ?? 0, 2)}" : $"{Say.Number(_dragged ?? answer.Smoothing.Df ?? 0, 1)} degrees of freedom";

    private async Task Drag(ChangeEventArgs e)
    {
        if (_curve.Answer is not { } answer || !double.TryParse(e.Value?.ToString(), NumberStyles.Float, CultureInfo.InvariantCulture, out double position))
            return;
        _dragged = FromSlider(answer, position);
        await _quick.AskAsync(Id, Current() with { Span = Way == LocalWay ? _dragged : null, Df = Way == SplineWay ? _dragged : null, By = null, Choose = null, WithScores = false, ReadOff = null, Band = new BandChoice { Kind = BandKind.None } }, RunSet!.Revision);
    }

    private void Drop(ChangeEventArgs e)
    {
        if (_curve.Answer is { } answer && double.TryParse(e.Value?.ToString(), NumberStyles.Float, CultureInfo.InvariantCulture, out double position))
            Desk.Set((Way == LocalWay ? "span" : "df", FromSlider(answer, position).ToString(CultureInfo.InvariantCulture)));
    }

    private IReadOnlyList<(double, double, double)> BandOf(CurveAnswer answer) =>
        _dragged is not null || answer.NoShape is not null ? [] : [.. answer.Points.Where(p => p is { Low: not null, High: not null }).Select(p => (p.At[0], p.Low!.Value, p.High!.Value))];

    private IReadOnlyList<(double, double, double)> WholeOf(CurveAnswer answer) =>
        _dragged is not null || answer.NoShape is not null ? [] : [.. answer.Points.Where(p => p is { SimultaneousLow: not null, SimultaneousHigh: not null }).Select(p => (p.At[0], p.SimultaneousLow!.Value, p.SimultaneousHigh!.Value))];

    private static (double, double)? LineOf(CurveAnswer answer) => answer is { NoShape: null, StraightLine: { } line } ? (line.Intercept, line.Slope) : null;

    private static IReadOnlyList<(string, IReadOnlyList<(double, double)>)> OthersOf(CurveAnswer answer) =>
        [.. (answer.Categories ?? []).Where(c => c.Reason is null).Select(c => (c.Level, (IReadOnlyList<(double, double)>)[.. c.Points.Where(p => p.Fitted is not null).Select(p => (p.At[0], p.Fitted!.Value))]))];

    // squared errors are shown as typical errors, in the reading's own unit
    private bool InUnits => Choice is not ("gcv" or "aicc");

    private IReadOnlyList<ScorePlot.Point> ScoresOf(CurveAnswer answer) =>
    [
        .. answer.Smoothing.Scores.Where(s => s.Score is not null).Select(s => InUnits && s.Score > 0
            ? new ScorePlot.Point(s.Span ?? s.Df ?? 0, Math.Sqrt(s.Score.Value), s.Se / (2 * Math.Sqrt(s.Score.Value)))
            : new ScorePlot.Point(s.Span ?? s.Df ?? 0, s.Score!.Value, s.Se)),
    ];

    // a chosen number of degrees of freedom comes out of a search, so it is the nearest one tried that is marked
    private static double? ChosenDf(CurveAnswer answer) => answer.Smoothing.Df is { } df ? answer.Smoothing.Scores.Where(s => s.Df is not null).MinBy(s => Math.Abs(s.Df!.Value - df))?.Df : null;

    private string ScoreCaption(CurveAnswer answer)
    {
        string what = Choice switch
        {
            "gcv" => "Generalised cross-validation score",
            "aicc" => "Corrected Akaike criterion",
            "leave-one-out" => $"Typical error when a run is left out{Comma(UnitOf(Reading))}",
            _ => $"Typical error on unseen {(VehiclesCount ? "vehicles" : "records")}{Comma(UnitOf(Reading))}",
        };
        string within = answer.Smoothing.OneStandardError is { } one ? $" The stiffest choice within one standard error of the best is {(Way == LocalWay ? "span" : "df")} {Say.Number(one, 2)}." : "";
        return what + "." + within;
    }

    private string Stiffness(CurveAnswer answer)
    {
        if (!Chooses)
            return "through every point";
        string amount = Way == LocalWay ? $"span {Say.Number(answer.Smoothing.Span ?? 0, 2)}" : $"{Say.Number(answer.Smoothing.Df ?? 0, 1)} degrees of freedom";
        return Choice switch
        {
            "stated" => amount + " as stated",
            "leave-one-out" => amount + " by leaving out each run",
            "gcv" => amount + " by generalised cross-validation",
            "aicc" => amount + " by the corrected Akaike criterion",
            _ => $"{amount} by 10 parts of whole {(VehiclesCount ? "vehicles" : "records")}",
        };
    }

    private string Caption(CurveAnswer answer)
    {
        if (answer.NoShape is not null)
            return "The records without a curve.";
        string way = Ways.First(w => w.Item1 == Way).Item2, level = Say.Percent(Confidence);
        string bands = answer.Points.Any(p => p.SimultaneousLow is not null) ? $" Dark band: {level} at one place; light band: {level} for the whole curve." : answer.Points.Any(p => p.Low is not null) ? $" Band: {level} at one place." : "";
        string others = answer.Categories is not null ? $" Coloured lines: each {By} by itself." : "";
        string along = Against.Count > 1 ? $" Drawn along {Against[0]} with {Say.List([.. Against.Skip(1)])} at the median." : "";
        return $"Line: {way}.{bands}{(answer.StraightLine is not null ? " Dashed: straight line." : "")}{others}{along} Ticks show where the records are; the curve stops where the tested range stops.";
    }

    private List<IReadOnlyList<string>> Figures(CurveAnswer answer)
    {
        static string Full(double? v) => v?.ToString("R", CultureInfo.InvariantCulture) ?? "";
        var rows = new List<IReadOnlyList<string>> { (string[])[.. Against.Select(Titled), Titled(Reading), "standard error", "low", "high", "whole curve low", "whole curve high"] };
        foreach (var p in answer.Points)
            rows.Add([.. p.At.Select(v => Full(v)), Full(p.Fitted), Full(p.Se), Full(p.Low), Full(p.High), Full(p.SimultaneousLow), Full(p.SimultaneousHigh)]);
        return rows;
    }

    private static int Decimals(CurveAnswer answer) => Say.DecimalsFor(answer.Points.Select(p => p.Se ?? double.NaN).Where(double.IsFinite).DefaultIfEmpty((answer.Smoothing.S ?? 1) / 3).Average());

    private static int PlaceDecimals(CurveAnswer answer) => Math.Max(0, Say.DecimalsFor((answer.Tested[0].To - answer.Tested[0].From) / 20) - 1);

    private string Titled(string column) => column.EndsWith("curve", StringComparison.Ordinal) ? column + Comma(UnitOf(Reading)) : column + Comma(UnitOf(column));

    private static string Comma(string unit) => unit.Length == 0 ? "" : ", " + unit;

    private bool Candidate(ColumnDefinition c) => c.Kind == ColumnKind.Number && c.Name != Reading;

    private string? Known(string? column) => NumberColumns.Any(c => c.Value == column) ? column : null;

    private double? Number(string name) => double.TryParse(Desk.Value(name), NumberStyles.Float, CultureInfo.InvariantCulture, out double v) && double.IsFinite(v) ? v : null;

    private static T Parsed<T>(string wire)
        where T : struct, Enum =>
        System.Text.Json.JsonSerializer.Deserialize<T>($"\"{wire}\"", Gaugeyard.Analysis.Work.WireFormat.Json);
}

/// <summary>A setting's text, or what stands when the address has none.</summary>
internal static class SettingText
{
    public static string OrElse(this string? value, string other) => string.IsNullOrEmpty(value) ? other : value;
}
