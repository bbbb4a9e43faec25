using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Answers a curve question by local regression.</summary>
internal static class LocalCurves
{
    private const double UsualSpan = 0.75;

    // scoring costs O(n^2) per span and part; a few tens of thousands of records settle a span as well as millions
    private const int MostScored = 30_000;

    public static CurveResult Of(CurveQuestion question, CurveData data, double[][] points, WorkContext work)
    {
        var notes = new List<string>();
        LocalRegressionOptions Options(double span) => new() { Degree = question.Degree ?? 2, Span = span, Robust = question.Robust };
        var scored = data.AtMost(MostScored, question.Seed);
        if (scored != data && question.Choose is not null)
            notes.Add($"Spans were compared on {Say.Count(scored.Y.Length, "record")} of {Say.Count(scored.UnitCount, scored.UnitWord == "records" ? "record" : "vehicle")} drawn at random.");
        var scores = question.Choose is { } choose && (question.Span is null || question.Spans is { Count: > 0 } || question.WithScores) ? Scores(choose, question, scored, Options, work) : [];
        double span = question.Span ?? Best(scores, data, question) ?? UsualSpan;
        if (scores.Count > 0 && question.Choose != ChooseBy.KFold && data.Sample.VehiclesRepeat)
            notes.Add("Leaving out single runs flatters a loose curve where vehicles repeat, since other runs of the same vehicle stay in. Choosing by parts of whole vehicles is safer.");
        if (question is { Choose: ChooseBy.LeaveOneOut, Robust: true })
            notes.Add("For the robust fit the leave-one-out scores hold the robustness weights fixed, so they are approximate.");

        work.Say(0.4, "fitting the curve");
        var (fit, reason) = LocalRegression.Of(data.X, data.Y, Options(span), cancel: work.Cancel);
        if (fit is null)
            throw new CannotAnswerException(Say.Sentence(reason!) + ". Take a wider span or a lower degree.");
        bool quick = question.Band?.Kind == BandKind.None, resampled = question.Band?.Kind == BandKind.Bootstrap;
        bool moments = !quick && (data.X.Length == 1 ? !resampled || data.Y.Length <= 20_000 : data.Y.Length <= 6000);
        var statistics = fit.Statistics(moments, question.Seed, work.Cancel);
        double[] fitted = [.. points.Select(p => data.Inside(p) ? fit.Evaluate(p) : double.NaN)];
        var figures = new SmoothingFigures
        {
            Span = span,
            Trace = UnseenParts.Finite(statistics.Trace),
            S = UnseenParts.Finite(statistics.S),
            Scores = scores,
            OneStandardError = OneStandardError(scores),
        };
        if (points.Any(p => !data.Inside(p)))
            notes.Add("Points outside the tested range are not read off.");
        if (data.Y.Length > LocalRegression.Thinned && data.X.Length == 1)
            notes.Add("Residual scale and trace rest on fits at 400 places spread evenly over the records.");
        var result = new CurveResult
        {
            Points = [.. points.Select((p, g) => new CurvePoint(p, UnseenParts.Finite(fitted[g]), null, null, null, null, null))],
            Smoothing = figures,
            Fitted = statistics.Fitted,
            Notes = notes,
            Method = Words(question, data, fit, span, scores.Count > 0),
        };
        if (quick)
            return result;
        work.Say(0.5, "comparing with a straight line");
        result = result with { StraightLine = UnseenParts.AgainstLine(scored, question.Seed, Trainer(scored, Options(span), work.Cancel), work.Cancel) };
        if (resampled)
            return LocalBands.Add(result, question, data, points, fitted, fit, statistics, work);
        return ByFormula(result, question, data, points, fitted, fit, statistics);
    }

    private static CurveResult ByFormula(CurveResult result, CurveQuestion question, CurveData data, double[][] points, double[] fitted, LocalRegression fit, LocalStatistics statistics)
    {
        if (!(statistics.S >= 0) || !(statistics.Df > 0))
            return result with { Notes = [.. result.Notes, "Pointwise errors by formula cannot be had here; ask for the bootstrap band."] };
        double t = Probability.StudentQuantile(0.5 + question.Confidence / 2, statistics.Df);
        double[] se = [.. points.Select((p, g) => double.IsNaN(fitted[g]) ? double.NaN : statistics.S * fit.ErrorFactor(p))];
        return result with
        {
            Points = [.. points.Select((p, g) => double.IsNaN(fitted[g]) ? result.Points[g] : new CurvePoint(p, fitted[g], UnseenParts.Finite(se[g]), UnseenParts.Finite(fitted[g] - t * se[g]), UnseenParts.Finite(fitted[g] + t * se[g]), null, null))],
            Difference = (a, b) =>
            {
                if (fit.OperatorRow(points[a]) is not { } from || fit.OperatorRow(points[b]) is not { } to)
                    return null;
                double sum = 0;
                for (int i = 0; i < from.Length; i++)
                    sum += (to[i] - from[i]) * (to[i] - from[i]);
                double half = t * statistics.S * Math.Sqrt(sum), d = fitted[b] - fitted[a];
                return (d - half, d + half);
            },
            Notes = data.Sample.VehiclesRepeat ? [.. result.Notes, "The formula's errors take every run as independent; runs of one vehicle are not, so these intervals are too narrow. The bootstrap by vehicle is right."] : result.Notes,
            Method = [.. result.Method, "Pointwise intervals from the operator of the fit and the residual scale."],
        };
    }

    private static List<StiffnessScore> Scores(ChooseBy choose, CurveQuestion question, CurveData data, Func<double, LocalRegressionOptions> options, WorkContext work)
    {
        var scores = new List<StiffnessScore>();
        foreach (double span in question.SpansTried)
        {
            work.Cancel.ThrowIfCancellationRequested();
            work.Say(0.4 * scores.Count / question.SpansTried.Count, $"trying span {Say.Number(span, 2)}");
            var (score, se) = ScoreOf(choose, question, data, options(span), work.Cancel);
            scores.Add(new StiffnessScore(span, null, score, se));
        }
        return scores;
    }

    private static (double? Score, double? Se) ScoreOf(ChooseBy choose, CurveQuestion question, CurveData data, LocalRegressionOptions options, CancellationToken cancel)
    {
        if (choose == ChooseBy.KFold)
            return UnseenParts.Summary(UnseenParts.ByUnit(data, UnseenParts.Predict(data, question.Seed, Trainer(data, options, cancel), cancel)));
        if (LocalRegression.Of(data.X, data.Y, options, cancel: cancel).Fit is not { } fit)
            return (null, null);
        if (choose == ChooseBy.LeaveOneOut)
        {
            double[] left = fit.LeaveOneOut(cancel);
            return left.Any(double.IsNaN) ? (null, null) : UnseenParts.Summary([.. left.Select((l, i) => (data.Y[i] - l) * (data.Y[i] - l))]);
        }
        var s = fit.Statistics(moments: false, cancel: cancel);
        return (UnseenParts.Finite(choose == ChooseBy.Gcv ? s.Gcv : s.Aicc), null);
    }

    private static Func<int[], Func<int, double>> Trainer(CurveData data, LocalRegressionOptions options, CancellationToken cancel) => rows =>
    {
        double[][] x = [.. data.X.Select(c => rows.Select(i => c[i]).ToArray())];
        var fit = LocalRegression.Of(x, [.. rows.Select(i => data.Y[i])], options, cancel: cancel).Fit;
        return i => fit is null ? double.NaN : fit.Evaluate((double[])[.. data.X.Select(c => c[i])]);
    };

    private static double? Best(List<StiffnessScore> scores, CurveData data, CurveQuestion question)
    {
        if (scores.Count == 0)
            return null;
        return (question.OneStandardError ? OneStandardError(scores) : null) ?? scores.Where(s => s.Score is not null).MinBy(s => s.Score)?.Span
            ?? throw new CannotAnswerException($"None of the spans can be fitted to {data.Y.Length} records with degree {question.Degree ?? 2}. Take wider spans or a lower degree.");
    }

    private static double? OneStandardError(List<StiffnessScore> scores)
    {
        if (scores.Where(s => s.Score is not null).MinBy(s => s.Score) is not { Se: { } se } best)
            return null;
        return scores.Where(s => s.Score <= best.Score + se).Max(s => s.Span);
    }

    private static List<string> Words(CurveQuestion question, CurveData data, LocalRegression fit, double span, bool chosen) =>
    [
        $"Local regression of degree {fit.Options.Degree} with tricube weights over {fit.Neighbours} of {data.Y.Length} records (span {Say.Number(span, 3)}), fitted directly at every point (Cleveland and Devlin 1988).{(question.Robust ? " Records far off are weighed down in three further passes." : "")}{(data.X.Length > 1 ? " Each predictor is divided by its 10 % trimmed standard deviation." : "")}",
        question.Span is not null || !chosen ? "The span was stated." : question.Choose switch
        {
            ChooseBy.KFold => $"The span was chosen by {Math.Min(UnseenParts.Parts, data.UnitCount)} parts of whole {data.UnitWord}: the error on a part is measured with a curve fitted to the others (cross-validation).",
            ChooseBy.LeaveOneOut => "The span was chosen by leaving out each record in turn and refitting.",
            ChooseBy.Gcv => "The span was chosen by generalised cross-validation.",
            _ => "The span was chosen by the corrected Akaike criterion of Hurvich, Simonoff and Tsai (1998).",
        },
    ];
}
