using Gaugeyard.Analysis.Curves;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Smoothing;
using Xunit;

namespace Gaugeyard.Analysis.Tests.Curves;

public sealed class CurveQuestionTests
{
    // NIST/SEMATECH e-Handbook, section 4.1.4.4, "Example of LOESS computations": 21 points
    private static readonly double[] HandbookX = [0.5578196, 2.0217271, 2.5773252, 3.4140288, 4.3014084, 4.7448394, 5.1073781, 6.5411662, 6.7216176, 7.2600583, 8.1335874, 9.1224379, 11.9296663, 12.3797674, 13.2728619, 14.2767453, 15.3731026, 15.6476637, 18.5605355, 18.5866354, 18.7572812];
    private static readonly double[] HandbookY = [18.63654, 103.49646, 150.35391, 190.51031, 208.70115, 213.71135, 228.49353, 233.55387, 234.55054, 223.89225, 227.68339, 223.91982, 168.01999, 164.95750, 152.61107, 160.78742, 168.55567, 152.42658, 221.70702, 222.69040, 243.18828];

    private static NumberColumn Number(string name, double[] values, string? unit = null) => new(new ColumnDefinition(name, ColumnKind.Number) { Unit = unit }, values);

    private static CodedColumn Texts(string name, ColumnRole role, string[] texts) => CodedColumn.FromTexts(new ColumnDefinition(name, ColumnKind.Category) { Role = role }, texts);

    private static RevisionContent Handbook() => RevisionContent.InMemory([Number("x", HandbookX), Number("y", HandbookY)]);

    // 40 vehicles with four runs each: consumption falls with temperature, then stays level; winter tyres lie higher
    private static RevisionContent Fleet(int vehicles = 40, double slope = 0.12)
    {
        var random = new Random(12);
        const int Runs = 4;
        int n = vehicles * Runs;
        double[] level = [.. Enumerable.Range(0, vehicles).Select(_ => 0.2 * (random.NextDouble() - 0.5))], temperature = new double[n], city = new double[n];
        string[] vehicle = new string[n], tyre = new string[n];
        for (int i = 0; i < n; i++)
        {
            temperature[i] = -15 + 45 * random.NextDouble();
            vehicle[i] = "V" + i / Runs;
            tyre[i] = i / Runs % 2 == 0 ? "summer" : "winter";
            city[i] = 8 + slope * Math.Max(0, 12 - temperature[i]) + level[i / Runs] + (tyre[i] == "winter" ? 0.3 : 0) + 0.3 * (random.NextDouble() - 0.5);
        }
        return RevisionContent.InMemory([Number("city", city, "L/100km"), Number("temperature", temperature, "degC"), Texts("vehicle", ColumnRole.Vehicle, vehicle), Texts("tyre", ColumnRole.Attribute, tyre)]);
    }

    private static CurveQuestion Ask => new() { Reading = "city", Against = ["temperature"], Choose = ChooseBy.KFold, Band = new BandChoice { Kind = BandKind.Bootstrap, Times = 200 } };

    [Fact]
    public void The_handbooks_points_are_read_off_and_nothing_outside_the_tested_range()
    {
        var answer = new CurveQuestion { Reading = "y", Against = ["x"], Degree = 1, Span = 7.0 / 21, At = [[HandbookX[4]], [0.5], [HandbookX[20]]] }.Ask(Handbook(), WorkContext.None);
        Assert.Equal(207.23338, answer.Points[0].Fitted!.Value, 6e-6);
        Assert.Equal(new CurvePoint([0.5], null, null, null, null, null, null) with { At = answer.Points[1].At }, answer.Points[1]);
        Assert.Equal(231.55856, answer.Points[2].Fitted!.Value, 6e-6);
        Assert.Contains(answer.Notes, n => n.Contains("outside the tested range", StringComparison.Ordinal));
    }

    [Fact]
    public void Pointwise_intervals_come_from_the_operator()
    {
        var answer = new CurveQuestion { Reading = "y", Against = ["x"], Degree = 1, Span = 0.5, At = [[10]] }.Ask(Handbook(), WorkContext.None);
        var fit = LocalRegression.Of([HandbookX], HandbookY, new LocalRegressionOptions { Degree = 1, Span = 0.5 }).Fit!;
        var s = fit.Statistics();
        double se = s.S * Math.Sqrt(fit.OperatorRow([10])!.Sum(l => l * l));
        Assert.Equal(se, answer.Points[0].Se!.Value, 1e-10);
        Assert.Equal(MathOf(s.Df) * se, answer.Points[0].High!.Value - answer.Points[0].Fitted!.Value, 1e-8);

        static double MathOf(double df) => Statistics.Numerics.Probability.StudentQuantile(0.975, df);
    }

    [Fact]
    public void Vehicles_are_drawn_whole_and_the_same_seed_gives_the_same_answer()
    {
        var answer = Ask.Ask(Fleet(), WorkContext.None);
        var again = Ask.Ask(Fleet(), WorkContext.None);
        Assert.Equal(answer.Points.Select(p => (p.Low, p.High, p.SimultaneousLow, p.SimultaneousHigh)), again.Points.Select(p => (p.Low, p.High, p.SimultaneousLow, p.SimultaneousHigh)));
        Assert.All(answer.Points, p => Assert.True(p.SimultaneousLow <= p.Low && p.Low <= p.Fitted && p.Fitted <= p.High && p.High <= p.SimultaneousHigh));
        Assert.NotEqual(answer.Points[10].Low, (Ask with { Seed = 2 }).Ask(Fleet(), WorkContext.None).Points[10].Low);
        Assert.Throws<QuestionException>(() => (Ask with { Band = new BandChoice { Kind = BandKind.Bootstrap, Resample = ResampleBy.Record, Times = 100 } }).Ask(Fleet(), WorkContext.None));
        Assert.Equal(40, answer.Basis.Vehicles);
        Assert.Equal(9, answer.Smoothing.Scores.Count);
        Assert.True(answer.Smoothing.OneStandardError >= answer.Smoothing.Span);
        double chosen = answer.Smoothing.Scores.Single(s => s.Span == answer.Smoothing.Span).Score!.Value;
        Assert.All(answer.Smoothing.Scores, s => Assert.True(chosen <= s.Score));
    }

    [Fact]
    public void The_finding_says_the_change_its_interval_and_that_a_straight_line_misses_it()
    {
        var answer = Ask.Ask(Fleet(), WorkContext.None);
        // 0.12 L/100 km per degree over the 27 degrees from -15 to 12
        Assert.Equal(-3.24, answer.Change!.Difference, 0.35);
        Assert.True(answer.Change.Low < answer.Change.Difference && answer.Change.Difference < answer.Change.High && answer.Change.High < 0);
        Assert.Matches("^City falls [23]\\.\\d+ L/100 km from −1\\d to 1?\\d °C \\([23]\\.\\d+ to [23]\\.\\d+\\), then stays level; a straight line misses this\\.$", answer.Headline.Replace((char)0xa0, (char)32));

        var flat = Ask.Ask(Fleet(slope: 0), WorkContext.None);
        Assert.DoesNotContain("misses", flat.Headline, StringComparison.Ordinal);
    }

    [Fact]
    public void Curves_by_category_and_places_read_off()
    {
        var answer = (Ask with { By = "tyre", ReadOff = [0, 20, 60], Span = 0.6 }).Ask(Fleet(), WorkContext.None);
        Assert.Equal(["summer", "winter"], answer.Categories!.Select(c => c.Level));
        Assert.All(answer.Categories!, c => Assert.True(c.Reason is null && c.Records == 80 && c.Vehicles == 20));
        double Mean(int k) => answer.Categories![k].Points.Average(p => p.Fitted!.Value);
        Assert.Equal(0.3, Mean(1) - Mean(0), 0.25);
        Assert.Equal(3, answer.ReadOff!.Count);
        Assert.Equal(9.6, answer.ReadOff[0].Fitted!.Value, 0.3);
        Assert.True(answer.ReadOff[1].Low < answer.ReadOff[1].Fitted);
        Assert.Null(answer.ReadOff[2].Fitted);
        Assert.Equal(100, answer.Points.Count);
        Assert.Equal([-10.0, 0, 10, 20], (Ask with { ReadOff = [], Band = new BandChoice { Kind = BandKind.None }, Span = 0.6, Choose = null }).Ask(Fleet(), WorkContext.None).ReadOff!.Select(p => p.At[0]));
    }

    [Theory]
    [InlineData(ResampleBy.Wild)]
    [InlineData(ResampleBy.Vehicle)]
    public void A_spline_has_bands_too(ResampleBy by)
    {
        var answer = (Ask with { Way = CurveWay.SmoothingSpline, Df = 6, Band = new BandChoice { Kind = BandKind.Bootstrap, Resample = by, Times = 200 } }).Ask(Fleet(), WorkContext.None);
        Assert.Equal(6, answer.Smoothing.Df!.Value, 1e-6);
        Assert.All(answer.Points, p => Assert.True(p.SimultaneousLow <= p.Low && p.Low <= p.Fitted && p.Fitted <= p.High));
        // a vehicle's level varies by .2 / sqrt(12) over 40 vehicles, residuals by .3 / sqrt(12): errors in the middle are some hundredths
        Assert.InRange(answer.Points[50].Se!.Value, 0.01, 0.1);
    }

    [Fact]
    public void A_spline_is_chosen_by_parts_of_whole_vehicles_where_they_repeat()
    {
        var answer = new CurveQuestion { Reading = "city", Against = ["temperature"], Way = CurveWay.SmoothingSpline }.Ask(Fleet(), WorkContext.None);
        Assert.Contains(answer.Method, m => m.Contains("whole vehicles", StringComparison.Ordinal));
        Assert.Contains(answer.Smoothing.Scores, s => s.Df == Math.Round(answer.Smoothing.Df!.Value, 6));
    }

    [Fact]
    public void Few_distinct_values_get_a_reason_and_still_their_figures()
    {
        var content = RevisionContent.InMemory([Number("y", [1, 2, 3, 4, 5, 6, 7, 8]), Number("x", [1, 1, 2, 2, 3, 3, 4, 4])]);
        var answer = new CurveQuestion { Reading = "y", Against = ["x"], Degree = 1, Span = 1 }.Ask(content, WorkContext.None);
        Assert.Contains("only 4 distinct values", answer.NoShape, StringComparison.Ordinal);
        Assert.Equal(answer.NoShape, answer.Headline);
        Assert.All(answer.Points, p => Assert.NotNull(p.Fitted));
    }

    [Fact]
    public void Data_that_cannot_carry_a_curve_get_a_reason_and_wrong_questions_a_sentence()
    {
        var three = RevisionContent.InMemory([Number("y", [1, 2, 3]), Number("x", [1, 2, 3]), Number("level", [4, 4, 4])]);
        Assert.Throws<CannotAnswerException>(() => new CurveQuestion { Reading = "y", Against = ["level"] }.Ask(three, WorkContext.None));
        Assert.Throws<CannotAnswerException>(() => new CurveQuestion { Reading = "y", Against = ["x"], Span = 0.3 }.Ask(three, WorkContext.None));
        Assert.All(new CurveQuestion { Reading = "level", Against = ["x"], Degree = 1, Span = 1.5 }.Ask(three, WorkContext.None).Points, p => Assert.Equal(4, p.Fitted!.Value, 1e-9));
        Assert.Throws<QuestionException>(() => new CurveQuestion { Reading = "y", Against = ["y"] }.Ask(three, WorkContext.None));
        Assert.Throws<QuestionException>(() => new CurveQuestion { Reading = "y", Against = ["nowhere"] }.Ask(three, WorkContext.None));
        Assert.Throws<QuestionException>(() => new CurveQuestion { Reading = "y", Against = ["x"], Degree = 3 }.Ask(three, WorkContext.None));
        Assert.Throws<QuestionException>(() => new CurveQuestion { Reading = "y", Against = ["x"], Way = CurveWay.Akima, Band = new BandChoice() }.Ask(three, WorkContext.None));
    }

    [Fact]
    public void Work_stops_when_asked_to()
    {
        using var stop = new CancellationTokenSource();
        stop.Cancel();
        Assert.ThrowsAny<OperationCanceledException>(() => Ask.Ask(Fleet(), new WorkContext(stop.Token)));
    }
}
