using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Answers a curve question by a smoothing spline.</summary>
internal static class SplineCurves
{
    private static readonly double[] UsualDf = [3, 4, 5, 6, 8, 10, 12, 15, 20];

    public static CurveResult Of(CurveQuestion question, CurveData data, double[][] points, WorkContext work)
    {
        var (problem, reason) = SmoothingSpline.Of(data.X[0], data.Y);
        if (problem is null)
            throw new CannotAnswerException(Say.Sentence(reason!) + ".");
        if (question.Df is { } stated && !(stated > 2 && stated < problem.Distinct))
            throw new QuestionException($"Degrees of freedom must lie above 2 and below {problem.Distinct}, the number of distinct values of {question.Against[0]}, but are {stated}.");
        var notes = new List<string>();
        // single runs would flatter a loose curve where vehicles repeat
        var choose = question.Choose ?? (data.Sample.VehiclesRepeat ? ChooseBy.KFold : ChooseBy.Gcv);
        var scores = question.Df is null || question.WithScores ? Scores(choose, question, data, problem, work) : [];
        work.Say(0.4, "fitting the curve");
        var fit = question.Df is { } df ? problem.FitDf(df) : choose switch
        {
            ChooseBy.KFold => problem.FitDf((question.OneStandardError ? OneStandardError(scores) : null) ?? scores.Where(s => s.Score is not null).MinBy(s => s.Score)?.Df ?? throw new CannotAnswerException($"{question.Against[0]} has too few distinct values to choose a stiffness. State the degrees of freedom.")),
            ChooseBy.LeaveOneOut => problem.Choose(SplineCriterion.LeaveOneOut, work.Cancel),
            ChooseBy.Aicc => problem.Choose(SplineCriterion.Aicc, work.Cancel),
            _ => problem.Choose(SplineCriterion.Gcv, work.Cancel),
        };
        if (choose != ChooseBy.KFold && question.Df is null && data.Sample.VehiclesRepeat)
            notes.Add("Scores by single runs flatter a loose curve where vehicles repeat. Choosing by parts of whole vehicles is safer.");
        double[] fitted = [.. points.Select(p => data.Inside(p) ? fit.Evaluate(p[0]) : double.NaN)];
        if (points.Any(p => !data.Inside(p)))
            notes.Add("Points outside the tested range are not read off.");
        var result = new CurveResult
        {
            Points = [.. points.Select((p, g) => new CurvePoint(p, UnseenParts.Finite(fitted[g]), null, null, null, null, null))],
            Smoothing = new SmoothingFigures { Df = fit.Df, Trace = fit.Df, S = UnseenParts.Finite(fit.S), Scores = scores, OneStandardError = OneStandardError(scores) },
            Fitted = fit.FittedValues(),
            Notes = notes,
            Method =
            [
                "Cubic smoothing spline with a knot at every distinct value, computed exactly by two information filters (Kohn and Ansley 1989).",
                question.Df is not null ? "Its degrees of freedom were stated." : choose switch
                {
                    ChooseBy.KFold => $"Its degrees of freedom were chosen by {Math.Min(UnseenParts.Parts, data.UnitCount)} parts of whole {data.UnitWord} (cross-validation).",
                    ChooseBy.LeaveOneOut => "Its stiffness was chosen by leaving out each record in turn.",
                    ChooseBy.Aicc => "Its stiffness was chosen by the corrected Akaike criterion.",
                    _ => "Its stiffness was chosen by generalised cross-validation.",
                },
            ],
        };
        if (question.Band?.Kind == BandKind.None)
            return result;
        result = result with { StraightLine = UnseenParts.AgainstLine(data, question.Seed, Trainer(data, fit.Df), work.Cancel) };
        return question.Band?.Kind == BandKind.Bootstrap ? Bootstrap(result, question, data, points, fitted, fit, work) : Bayesian(result, question, data, points, fitted, fit);
    }

    private static CurveResult Bayesian(CurveResult result, CurveQuestion question, CurveData data, double[][] points, double[] fitted, SmoothingSpline.SplineFit fit)
    {
        double t = Probability.StudentQuantile(0.5 + question.Confidence / 2, Math.Max(1, data.Y.Length - fit.Df));
        return result with
        {
            Points =
            [
                .. points.Select((p, g) =>
                {
                    double se = fit.StandardError(p[0]);
                    return double.IsNaN(fitted[g]) ? result.Points[g] : new CurvePoint(p, fitted[g], UnseenParts.Finite(se), UnseenParts.Finite(fitted[g] - t * se), UnseenParts.Finite(fitted[g] + t * se), null, null);
                }),
            ],
            Notes = data.Sample.VehiclesRepeat ? [.. result.Notes, "These intervals take every run as independent; runs of one vehicle are not, so they are too narrow. The bootstrap by vehicle is right."] : result.Notes,
            Method = [.. result.Method, "Intervals are Bayesian (Wahba 1983)."],
        };
    }

    private static CurveResult Bootstrap(CurveResult result, CurveQuestion question, CurveData data, double[][] points, double[] fitted, SmoothingSpline.SplineFit fit, WorkContext work)
    {
        var plan = ResamplePlan.Of(question, data);
        int[] inside = [.. Enumerable.Range(0, points.Length).Where(g => !double.IsNaN(fitted[g]))];
        double[] at = [.. inside.Select(g => points[g][0])];
        var stage = work.Stage(0.5, 1, plan.Says);
        double lambda = fit.LambdaInUnits;
        double[] Curve(double[] x, double[] y, double[]? weights)
        {
            var again = SmoothingSpline.Of(x, y, weights).Problem?.FitInUnits(lambda);
            return [.. at.Select(p => again?.Evaluate(p) ?? double.NaN)];
        }
        double[][] curves;
        if (plan.By is ResampleBy.Residual or ResampleBy.Wild)
        {
            curves = plan.Each(data, fit.FittedValues(), fit.Hat(), y => Curve(data.X[0], y, null), stage, work.Cancel);
        }
        else
        {
            curves = new double[plan.Times][];
            int done = 0;
            Parallel.For(0, plan.Times, new ParallelOptions { CancellationToken = work.Cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
            {
                int[] counts = plan.Counts(b), rows = [.. Enumerable.Range(0, counts.Length).Where(i => counts[i] > 0)];
                curves[b] = Curve([.. rows.Select(i => data.X[0][i])], [.. rows.Select(i => data.Y[i])], [.. rows.Select(i => (double)counts[i])]);
                stage.Report((double)Interlocked.Increment(ref done) / plan.Times);
            });
        }
        return plan.Banded(result, points, fitted, inside, curves, question.Confidence, "The stiffness is held fixed in the resamples.");
    }

    private static List<StiffnessScore> Scores(ChooseBy choose, CurveQuestion question, CurveData data, SmoothingSpline problem, WorkContext work)
    {
        var scores = new List<StiffnessScore>();
        foreach (double df in UsualDf.Where(d => d < problem.Distinct))
        {
            work.Cancel.ThrowIfCancellationRequested();
            work.Say(0.4 * scores.Count / UsualDf.Length, $"trying {Say.Number(df, 0)} degrees of freedom");
            if (choose == ChooseBy.KFold)
            {
                var (score, se) = UnseenParts.Summary(UnseenParts.ByUnit(data, UnseenParts.Predict(data, question.Seed, Trainer(data, df), work.Cancel)));
                scores.Add(new StiffnessScore(null, df, score, se));
                continue;
            }
            var f = problem.FitDf(df);
            scores.Add(new StiffnessScore(null, df, UnseenParts.Finite(choose switch { ChooseBy.Aicc => f.Aicc, ChooseBy.LeaveOneOut => f.LeaveOneOut(), _ => f.Gcv }), null));
        }
        return scores;
    }

    private static Func<int[], Func<int, double>> Trainer(CurveData data, double df) => rows =>
    {
        var problem = SmoothingSpline.Of([.. rows.Select(i => data.X[0][i])], [.. rows.Select(i => data.Y[i])]).Problem;
        var fit = problem is null || df >= problem.Distinct || df <= 2 ? null : problem.FitDf(df);
        return i => fit?.Evaluate(data.X[0][i]) ?? double.NaN;
    };

    // the stiffest choice within one standard error of the best
    private static double? OneStandardError(List<StiffnessScore> scores) =>
        scores.Where(s => s.Score is not null).MinBy(s => s.Score) is { Se: { } se } best ? scores.Where(s => s.Score <= best.Score + se).Min(s => s.Df) : null;
}
