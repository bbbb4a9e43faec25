using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Resampling;
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
        var scores = new List<StiffnessScore>();
        SmoothingSpline.SplineFit fit;
        if (question.Df is { } df)
            fit = problem.FitDf(df);
        else
        {
            foreach (double d in UsualDf.Where(d => d < problem.Distinct))
            {
                work.Cancel.ThrowIfCancellationRequested();
                var f = problem.FitDf(d);
                scores.Add(new StiffnessScore(null, d, LocalCurves.Finite(question.Choose switch { ChooseBy.Aicc => f.Aicc, ChooseBy.LeaveOneOut => f.LeaveOneOut(data.X[0], data.Y), _ => f.Gcv }), null));
            }
            fit = problem.Choose(cancel: work.Cancel);
            if (data.Sample.VehiclesRepeat)
                notes.Add("Scores by single runs flatter a loose curve where vehicles repeat; state fewer degrees of freedom if the curve looks restless.");
        }
        double[] fitted = [.. points.Select(p => data.Inside(p) ? fit.Evaluate(p[0]) : double.NaN)];
        Band? band = null;
        if (question.Band?.Kind == BandKind.Bootstrap)
        {
            bool byVehicle = (question.Band.Resample ?? ResampleBy.Vehicle) == ResampleBy.Vehicle && data.Sample.VehicleOf is not null;
            if (!byVehicle && data.Sample.VehiclesRepeat)
                throw new QuestionException("Runs of one vehicle repeat here, so resampling single runs would make the band too narrow. Resample vehicles.");
            int units = byVehicle ? data.UnitCount : data.Y.Length;
            int[] unitOf = byVehicle ? data.Units : [.. Enumerable.Range(0, data.Y.Length)];
            var curves = new double[question.Band.Times][];
            int done = 0;
            Parallel.For(0, curves.Length, new ParallelOptions { CancellationToken = work.Cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
            {
                int[] counts = ResampleCounts.Of(unitOf, units, question.Seed, b);
                int[] rows = [.. Enumerable.Range(0, counts.Length).Where(i => counts[i] > 0)];
                // the same stiffness against the same range; weights are the counts
                var again = SmoothingSpline.Of([.. rows.Select(i => data.X[0][i])], [.. rows.Select(i => data.Y[i])], [.. rows.Select(i => (double)counts[i])]).Problem?.FitDfOr(fit.Df);
                curves[b] = [.. points.Select((p, g) => double.IsNaN(fitted[g]) ? 0 : again?.Evaluate(p[0]) ?? double.NaN)];
                work.Say(0.5 + 0.5 * Interlocked.Increment(ref done) / curves.Length, $"drawing {(byVehicle ? "vehicles" : "records")} anew, {curves.Length} times");
            });
            band = BootstrapIntervals.Bands([.. fitted.Select(f => double.IsNaN(f) ? 0 : f)], curves, question.Confidence, byVehicle && units < 30 ? Math.Sqrt(units / (units - 1.0)) : 1);
        }
        else if (data.Sample.VehiclesRepeat)
            notes.Add("These intervals take every run as independent; runs of one vehicle are not, so they are too narrow. The bootstrap by vehicle is right.");
        double t = Probability.StudentQuantile(0.5 + question.Confidence / 2, Math.Max(1, data.Y.Length - fit.Df));
        var answer = points.Select((p, g) =>
        {
            if (double.IsNaN(fitted[g]))
                return new CurvePoint(p, null, null, null, null, null, null);
            double se = band?.StandardError[g] ?? fit.StandardError(p[0]);
            return new CurvePoint(p, fitted[g], LocalCurves.Finite(se), LocalCurves.Finite(band?.Low[g] ?? fitted[g] - t * se), LocalCurves.Finite(band?.High[g] ?? fitted[g] + t * se), LocalCurves.Finite(band?.WholeLow[g]), LocalCurves.Finite(band?.WholeHigh[g]));
        }).ToList();
        if (points.Any(p => !data.Inside(p)))
            notes.Add("Points outside the tested range are not read off.");
        return new CurveResult(answer, new SmoothingFigures { Df = fit.Df, Trace = fit.Df, S = LocalCurves.Finite(fit.S), Scores = scores }, null, notes,
        [
            "Cubic smoothing spline with a knot at every distinct value, computed exactly by two information filters (Kohn and Ansley 1989).",
            question.Df is null ? "Its stiffness was chosen by generalised cross-validation." : "Its degrees of freedom were stated.",
            band is null ? "Intervals are Bayesian (Wahba 1983)." : $"Bands: {band.Used} resamples; percentile pointwise, sup-t for the whole curve.",
        ]);
    }

    private static SmoothingSpline.SplineFit? FitDfOr(this SmoothingSpline problem, double df) => df < problem.Distinct - 0.5 ? problem.FitDf(df) : null;
}
