namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// Local regression with one predictor on resamples given as counts: bandwidths are found again in every resample, so that each
/// curve equals a refit. The records are sorted once; a resample costs O(n + points q).
/// </summary>
public static class LocalBootstrap
{
    /// <summary>Curves at the points for each resample; the same bits on any number of threads.</summary>
    /// <param name="x">Predictor, n values.</param>
    /// <param name="y">Reading.</param>
    /// <param name="weights">Further weights (robust ones held fixed), or null.</param>
    /// <param name="at">Evaluation points.</param>
    /// <param name="options">Degree and span.</param>
    /// <param name="counts">Gives the counts of resample b.</param>
    /// <param name="times">Number of resamples.</param>
    public static IReadOnlyList<double[]> Curves(double[] x, double[] y, IReadOnlyList<double>? weights, double[] at, LocalRegressionOptions options, Func<int, int[]> counts, int times, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        if (x.Length != y.Length)
            throw new ArgumentException($"y must have length {x.Length} but has {y.Length}", nameof(y));
        int n = x.Length;
        int[] order = [.. Enumerable.Range(0, n)];
        Array.Sort((double[])x.Clone(), order);
        var curves = new double[times][];
        int done = 0;
        Parallel.For(0, times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            int[] drawn = counts(b);
            int kept = 0;
            for (int k = 0; k < n; k++)
                if (drawn[k] > 0)
                    kept++;
            double[] xs = new double[kept], ys = new double[kept], ws = new double[kept];
            var cumulated = new long[kept];
            long total = 0;
            for (int k = 0, next = 0; k < n; k++)
            {
                int i = order[k], c = drawn[i];
                if (c == 0)
                    continue;
                total += c;
                (xs[next], ys[next], ws[next], cumulated[next]) = (x[i], y[i], c * (weights?[i] ?? 1), total);
                next++;
            }
            var line = new SortedLine(xs, ys, ws, options.Degree, cumulated);
            int q = LocalRegression.NeighboursOf(total, options.Span);
            var curve = new double[at.Length];
            for (int g = 0; g < at.Length; g++)
                curve[g] = line.Fit(at[g], line.Bandwidth(at[g], q) * Math.Max(1, options.Span)).Value;
            curves[b] = curve;
            int ended = Interlocked.Increment(ref done);
            if (ended % 16 == 0)
                progress?.Report((double)ended / times);
        });
        return curves;
    }
}
