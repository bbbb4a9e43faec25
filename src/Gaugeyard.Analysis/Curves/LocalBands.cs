using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Resampling;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Bootstrap bands of a local regression.</summary>
internal static class LocalBands
{
    public static CurveResult Add(CurveResult result, CurveQuestion question, CurveData data, double[][] points, double[] fitted, LocalRegression fit, LocalStatistics statistics, WorkContext work)
    {
        var plan = ResamplePlan.Of(question, data);
        int[] inside = [.. Enumerable.Range(0, points.Length).Where(g => !double.IsNaN(fitted[g]))];
        double[][] at = [.. inside.Select(g => points[g])];
        var stage = work.Stage(0.55, 1, plan.Says);
        IReadOnlyList<double[]> curves = plan.By switch
        {
            ResampleBy.Residual or ResampleBy.Wild => Remade(plan, data, at, fit, statistics, stage, work.Cancel),
            _ when data.X.Length == 1 => LocalBootstrap.Curves(data.X[0], data.Y, fit.RobustWeights, [.. at.Select(p => p[0])], fit.Options, plan.Counts, plan.Times, stage, work.Cancel),
            _ => Refits(plan, data, at, fit, stage, work.Cancel),
        };
        return plan.Banded(result, points, fitted, inside, curves, question.Confidence, question.Robust ? "The robustness weights are held fixed in the resamples, so the band is approximate." : null);
    }

    // the operator of the fit stays, only the readings are made anew
    private static double[][] Remade(ResamplePlan plan, CurveData data, double[][] at, LocalRegression fit, LocalStatistics statistics, IProgress<double> progress, CancellationToken cancel)
    {
        double[]?[] rows = [.. at.Select(p => fit.OperatorRow(p))];
        return plan.Each(data, statistics.Fitted, statistics.Hat, y => [.. rows.Select(r => r is null ? double.NaN : Dot(r, y))], progress, cancel);
    }

    private static double Dot(double[] a, double[] b)
    {
        double sum = 0;
        for (int i = 0; i < a.Length; i++)
            sum += a[i] * b[i];
        return sum;
    }

    // several predictors: the records drawn, each with its count as weight of repetition, are fitted anew
    private static double[][] Refits(ResamplePlan plan, CurveData data, double[][] at, LocalRegression fit, IProgress<double> progress, CancellationToken cancel)
    {
        var curves = new double[plan.Times][];
        int done = 0;
        Parallel.For(0, plan.Times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            int[] counts = plan.Counts(b);
            int[] rows = [.. Enumerable.Range(0, counts.Length).SelectMany(i => Enumerable.Repeat(i, counts[i]))];
            double[]? weights = fit.RobustWeights is { } w ? [.. rows.Select(i => Math.Max(1e-12, w[i]))] : null;
            var again = LocalRegression.Of([.. data.X.Select(c => rows.Select(i => c[i]).ToArray())], [.. rows.Select(i => data.Y[i])], fit.Options with { Robust = false }, weights, cancel).Fit;
            curves[b] = [.. at.Select(p => again is null ? double.NaN : again.Evaluate(p))];
            progress.Report((double)Interlocked.Increment(ref done) / plan.Times);
        });
        return curves;
    }
}
