using Gaugeyard.Analysis.Influences;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Resampling;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Answers a curve question by local regression.</summary>
internal static class LocalCurves
{
    private const int Folds = 10;

    public static CurveResult Of(CurveQuestion question, CurveData data, double[][] points, WorkContext work)
    {
        int degree = question.Degree ?? 2;
        var notes = new List<string>();
        LocalRegressionOptions Options(double span) => new() { Degree = degree, Span = span, Robust = question.Robust };
        var scores = new List<StiffnessScore>();
        double span;
        double? within = null;
        if (question.Choose is { } choose && (question.Span is null || question.Spans is { Count: > 0 }))
        {
            var tried = question.SpansTried;
            for (int k = 0; k < tried.Count; k++)
            {
                work.Cancel.ThrowIfCancellationRequested();
                work.Say(0.4 * k / tried.Count, $"trying span {Say.Number(tried[k], 2)}");
                scores.Add(ScoreOf(choose, data, Options(tried[k]), question, work));
            }
            var usable = scores.Where(s => s.Score is not null).ToList();
            if (usable.Count == 0)
                throw new CannotAnswerException($"No span can be fitted to {data.Y.Length} records with degree {degree}. Take wider spans or a lower degree.");
            var best = usable.MinBy(s => s.Score)!;
            span = question.Span ?? best.Span!.Value;
            if (best.Se is { } se)
                within = usable.Where(s => s.Score <= best.Score + se).Max(s => s.Span);
            if (choose != ChooseBy.KFold && data.Sample.VehiclesRepeat)
                notes.Add("Leaving out single runs flatters a loose curve where vehicles repeat, since other runs of the same vehicle stay in. Choosing by parts of whole vehicles is safer.");
            if (choose == ChooseBy.LeaveOneOut && question.Robust)
                notes.Add("For the robust fit the leave-one-out scores hold the robustness weights fixed, so they are approximate.");
        }
        else
        {
            span = question.Span ?? 0.75;
        }
        work.Say(0.45, "fitting the curve");
        var (fit, reason) = LocalRegression.Of(data.X, data.Y, Options(span), cancel: work.Cancel);
        if (fit is null)
            throw new CannotAnswerException(Say.Sentence(reason!) + ".");
        bool formula = question.Band?.Kind == BandKind.Formula || question.Band is null;
        // exact moments of the residual operator cost n^2 memory; beyond this size errors come from the bootstrap only
        bool moments = formula && data.Y.Length <= 4000;
        var statistics = fit.Statistics(moments, question.Seed, work.Cancel);
        double[] fitted = [.. points.Select(p => data.Inside(p) ? fit.Evaluate((ReadOnlySpan<double>)p) : double.NaN)];
        Band? band = question.Band?.Kind == BandKind.Bootstrap ? Bootstrap(question, data, points, fitted, fit, statistics, notes, work) : null;
        double t = moments && statistics.Df > 0 ? Probability.StudentQuantile(0.5 + question.Confidence / 2, statistics.Df) : double.NaN;
        var answer = new List<CurvePoint>();
        for (int g = 0; g < points.Length; g++)
        {
            if (double.IsNaN(fitted[g]))
            {
                answer.Add(new CurvePoint(points[g], null, null, null, null, null, null));
                continue;
            }
            double se = double.NaN;
            if (band is not null)
                se = band.StandardError[g];
            else if (moments && fit.OperatorRow(points[g]) is { } row)
                se = statistics.S * Math.Sqrt(row.Sum(l => l * l));
            double low = band?.Low[g] ?? fitted[g] - t * se, high = band?.High[g] ?? fitted[g] + t * se;
            answer.Add(new CurvePoint(points[g], fitted[g], Finite(se), Finite(low), Finite(high), Finite(band?.WholeLow[g]), Finite(band?.WholeHigh[g])));
        }
        if (formula && moments && data.Sample.VehiclesRepeat)
            notes.Add("The formula's errors take every run as independent; runs of one vehicle are not, so these intervals are too narrow. The bootstrap by vehicle is right.");
        if (formula && !moments)
            notes.Add("Pointwise errors by formula are left out at this size; ask for the bootstrap band.");
        if (points.Any(p => !data.Inside(p)))
            notes.Add("Points outside the tested range are not read off.");
        return new CurveResult(
            answer,
            new SmoothingFigures { Span = span, Trace = Finite(statistics.Trace), S = Finite(statistics.S), Scores = scores, OneStandardError = within },
            data.X.Length == 1 ? Line(data, question.Seed, Options(span), work) : null,
            notes,
            [
                $"Local regression of degree {degree} with tricube weights over {fit.Neighbours} of {data.Y.Length} records (span {Say.Number(span, 3)}), fitted directly at every point (Cleveland and Devlin 1988).{(question.Robust ? " Records far off are weighed down in three further passes." : "")}",
                question.Choose switch
                {
                    ChooseBy.KFold => $"The span was chosen by {Folds} parts of whole {(data.Sample.VehicleOf is null ? "records" : "vehicles")}: the error on a part is measured with a curve fitted to the others.",
                    ChooseBy.LeaveOneOut => "The span was chosen by leaving out each record in turn and refitting.",
                    ChooseBy.Gcv => "The span was chosen by generalised cross-validation.",
                    ChooseBy.Aicc => "The span was chosen by the corrected Akaike criterion of Hurvich, Simonoff and Tsai (1998).",
                    _ => "The span was stated.",
                },
                band is not null ? $"Bands: {band.Used} resamples; percentile pointwise, sup-t for the whole curve (Montiel Olea and Plagborg-Møller 2019)." : "Pointwise intervals from the operator of the fit.",
            ]);
    }

    private static StiffnessScore ScoreOf(ChooseBy choose, CurveData data, LocalRegressionOptions options, CurveQuestion question, WorkContext work)
    {
        if (choose == ChooseBy.KFold)
        {
            var (score, se) = KFold(data, options, question.Seed, work.Cancel);
            return new StiffnessScore(options.Span, null, Finite(score), Finite(se));
        }
        if (LocalRegression.Of(data.X, data.Y, options, cancel: work.Cancel).Fit is not { } fit)
            return new StiffnessScore(options.Span, null, null, null);
        if (choose == ChooseBy.LeaveOneOut)
        {
            double[] left = fit.LeaveOneOut(work.Cancel);
            double[] errors = [.. left.Select((l, i) => (data.Y[i] - l) * (data.Y[i] - l)).Where(double.IsFinite)];
            if (errors.Length < data.Y.Length)
                return new StiffnessScore(options.Span, null, null, null);
            var m = Statistics.Describing.Moments.Of(errors);
            return new StiffnessScore(options.Span, null, m.Mean, Finite(m.StandardDeviation / Math.Sqrt(errors.Length)));
        }
        var s = fit.Statistics(moments: false, cancel: work.Cancel);
        return new StiffnessScore(options.Span, null, Finite(choose == ChooseBy.Gcv ? s.Gcv : s.Aicc), null);
    }

    private static (double Score, double Se) KFold(CurveData data, LocalRegressionOptions options, ulong seed, CancellationToken cancel)
    {
        double[] predicted = KFoldPredictions(data, seed, (train, at) =>
        {
            var fit = LocalRegression.Of([.. data.X.Select(c => train.Select(i => c[i]).ToArray())], [.. train.Select(i => data.Y[i])], options, cancel: cancel).Fit;
            return i => fit is null ? double.NaN : fit.Evaluate((ReadOnlySpan<double>)(double[])[.. data.X.Select(c => c[i])]);
        });
        return data.Score(predicted);
    }

    private static double[] KFoldPredictions(CurveData data, ulong seed, Func<int[], int[], Func<int, double>> train)
    {
        int folds = Math.Min(Folds, data.UnitCount);
        var part = Honesty.Folds([.. Enumerable.Range(0, data.UnitCount)], folds, seed, 0);
        var predicted = new double[data.Y.Length];
        for (int f = 0; f < folds; f++)
        {
            int[] inside = [.. Enumerable.Range(0, data.Y.Length).Where(i => part[data.Units[i]] != f)], outside = [.. Enumerable.Range(0, data.Y.Length).Where(i => part[data.Units[i]] == f)];
            var predict = train(inside, outside);
            Parallel.ForEach(outside, i => predicted[i] = predict(i));
        }
        return predicted;
    }

    // a straight line on the same folds: is the curve needed at all?
    private static StraightLine? Line(CurveData data, ulong seed, LocalRegressionOptions options, WorkContext work)
    {
        (double, double)? Fit(int[] rows)
        {
            double mx = rows.Average(i => data.X[0][i]), my = rows.Average(i => data.Y[i]), sxx = rows.Sum(i => Math.Pow(data.X[0][i] - mx, 2));
            if (!(sxx > 0))
                return null;
            double slope = rows.Sum(i => (data.X[0][i] - mx) * (data.Y[i] - my)) / sxx;
            return (my - slope * mx, slope);
        }
        if (Fit([.. Enumerable.Range(0, data.Y.Length)]) is not { } whole)
            return null;
        if (data.UnitCount < 5 || data.Y.Length > 20_000)
            return new StraightLine(whole.Item1, whole.Item2, null, null);
        double line = data.Score(KFoldPredictions(data, seed, (train, _) => Fit(train) is { } f ? i => f.Item1 + f.Item2 * data.X[0][i] : _ => double.NaN)).Score;
        double curve = KFold(data, options, seed, work.Cancel).Score;
        return new StraightLine(whole.Item1, whole.Item2, Finite(line), Finite(curve));
    }

    private static Band Bootstrap(CurveQuestion question, CurveData data, double[][] points, double[] fitted, LocalRegression fit, LocalStatistics statistics, List<string> notes, WorkContext work)
    {
        var choice = question.Band!;
        var by = choice.Resample ?? (data.Sample.VehicleOf is null ? ResampleBy.Record : ResampleBy.Vehicle);
        if (by is ResampleBy.Record or ResampleBy.Residual && data.Sample.VehiclesRepeat)
            throw new QuestionException("Runs of one vehicle repeat here, so resampling single runs would make the band too narrow. Resample vehicles, or use the wild bootstrap.");
        if (by == ResampleBy.Vehicle && data.Sample.VehicleOf is null)
            by = ResampleBy.Record;
        int units = by == ResampleBy.Vehicle ? data.UnitCount : data.Y.Length;
        int[] unitOf = by == ResampleBy.Vehicle ? data.Units : [.. Enumerable.Range(0, data.Y.Length)];
        if (by == ResampleBy.Vehicle && units < 12)
            notes.Add($"With only {units} vehicles, drawing vehicles anew gives bands that are too narrow; the wild bootstrap is better here.");
        if (question.Robust)
            notes.Add("The robustness weights are held fixed in the resamples, so the band is approximate.");
        double inflate = by == ResampleBy.Vehicle && units < 30 ? Math.Sqrt(units / (units - 1.0)) : 1;
        int[] inside = [.. Enumerable.Range(0, points.Length).Where(g => !double.IsNaN(fitted[g]))];
        double[] curve = [.. inside.Select(g => fitted[g])];
        var stage = work.Stage(0.5, 1, $"drawing {(by == ResampleBy.Vehicle ? "vehicles" : "records")} anew, {choice.Times} times");
        IReadOnlyList<double[]> curves;
        if (by is ResampleBy.Residual or ResampleBy.Wild)
            curves = Residuals(question, data, [.. inside.Select(g => points[g])], fit, statistics, by, choice.Times, stage, work.Cancel);
        else if (data.X.Length == 1)
            curves = LocalBootstrap.Curves(data.X[0], data.Y, fit.RobustWeights, [.. inside.Select(g => points[g][0])], fit.Options, b => ResampleCounts.Of(unitOf, units, question.Seed, b), choice.Times, stage, work.Cancel);
        else
            curves = Refits(question, data, [.. inside.Select(g => points[g])], fit, unitOf, units, choice.Times, stage, work.Cancel);
        var band = BootstrapIntervals.Bands(curve, curves, question.Confidence, inflate);
        if (band.Used < choice.Times)
            notes.Add($"{choice.Times - band.Used} of {choice.Times} resamples could not carry the whole curve and were passed over.");
        // back to all points, those outside the tested range empty
        double[] Spread(double[] part)
        {
            double[] all = [.. Enumerable.Repeat(double.NaN, points.Length)];
            for (int k = 0; k < inside.Length; k++)
                all[inside[k]] = part[k];
            return all;
        }
        return new Band(Spread(band.Low), Spread(band.High), Spread(band.WholeLow), Spread(band.WholeHigh), Spread(band.StandardError), band.Used);
    }

    // the operator of the fit stays, only the readings are made anew
    private static List<double[]> Residuals(CurveQuestion question, CurveData data, double[][] points, LocalRegression fit, LocalStatistics statistics, ResampleBy by, int times, IProgress<double> progress, CancellationToken cancel)
    {
        double[]?[] rows = [.. points.Select(p => fit.OperatorRow(p))];
        double[] scaled = [.. data.Y.Select((y, i) => (y - statistics.Fitted[i]) / Math.Sqrt(Math.Max(1e-6, 1 - statistics.Hat[i])))];
        double centre = scaled.Average();
        var curves = new double[times][];
        int done = 0;
        Parallel.For(0, times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            double[] y = new double[data.Y.Length];
            if (by == ResampleBy.Wild)
            {
                double[] m = ResampleCounts.Multipliers(data.UnitCount, question.Seed, b);
                for (int i = 0; i < y.Length; i++)
                    y[i] = statistics.Fitted[i] + m[data.Units[i]] * scaled[i];
            }
            else
            {
                var random = new RandomStream(question.Seed, 0xB0F7, (ulong)b);
                for (int i = 0; i < y.Length; i++)
                    y[i] = statistics.Fitted[i] + scaled[random.NextInt(y.Length)] - centre;
            }
            curves[b] = [.. rows.Select(r => r is null ? double.NaN : r.Zip(y, (l, v) => l * v).Sum())];
            progress.Report((double)Interlocked.Increment(ref done) / times);
        });
        return [.. curves];
    }

    private static List<double[]> Refits(CurveQuestion question, CurveData data, double[][] points, LocalRegression fit, int[] unitOf, int units, int times, IProgress<double> progress, CancellationToken cancel)
    {
        var curves = new double[times][];
        int done = 0;
        Parallel.For(0, times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            int[] counts = ResampleCounts.Of(unitOf, units, question.Seed, b);
            int[] rows = [.. Enumerable.Range(0, counts.Length).SelectMany(i => Enumerable.Repeat(i, counts[i]))];
            var again = LocalRegression.Of([.. data.X.Select(c => rows.Select(i => c[i]).ToArray())], [.. rows.Select(i => data.Y[i])], fit.Options with { Robust = false }, fit.RobustWeights is { } w ? [.. rows.Select(i => Math.Max(1e-12, w[i]))] : null, cancel).Fit;
            curves[b] = [.. points.Select(p => again is null ? double.NaN : again.Evaluate((ReadOnlySpan<double>)p))];
            progress.Report((double)Interlocked.Increment(ref done) / times);
        });
        return [.. curves];
    }

    internal static double? Finite(double? value) => value is { } v && double.IsFinite(v) ? v : null;
}
