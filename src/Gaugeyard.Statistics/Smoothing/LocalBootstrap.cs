using Gaugeyard.Statistics.Resampling;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// Local regression with one predictor on resamples given as counts: the bandwidth is found again in every resample, equal to
/// refitting it. Distances are sorted once per evaluation point, so a resample costs O(n) per point.
/// </summary>
public static class LocalBootstrap
{
    /// <summary>Curves at the points for each resample; the same bits on any number of threads.</summary>
    /// <param name="x">Predictor, n values.</param>
    /// <param name="y">Reading.</param>
    /// <param name="weights">Further weights (robust ones held fixed), or null.</param>
    /// <param name="at">Evaluation points.</param>
    /// <param name="counts">Gives the counts of resample b.</param>
    /// <param name="times">Number of resamples.</param>
    public static IReadOnlyList<double[]> Curves(double[] x, double[] y, IReadOnlyList<double>? weights, double[] at, LocalRegressionOptions options, Func<int, int[]> counts, int times, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        int n = x.Length;
        var order = new int[at.Length][];
        var distance = new double[at.Length][];
        for (int g = 0; g < at.Length; g++)
        {
            distance[g] = [.. x.Select(v => Math.Abs(v - at[g]))];
            order[g] = [.. Enumerable.Range(0, n)];
            Array.Sort(distance[g], order[g]);
        }
        var curves = new double[times][];
        int done = 0;
        Parallel.For(0, times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            int[] c = counts(b);
            long total = 0;
            foreach (int k in c)
                total += k;
            int q = (int)Math.Min(total, (long)Math.Floor(total * options.Span + 1e-5));
            var curve = new double[at.Length];
            for (int g = 0; g < at.Length; g++)
                curve[g] = Point(x, y, weights, c, at[g], order[g], distance[g], q, options);
            curves[b] = curve;
            int k2 = Interlocked.Increment(ref done);
            if (k2 % 16 == 0)
                progress?.Report((double)k2 / times);
        });
        return curves;
    }

    private static double Point(double[] x, double[] y, IReadOnlyList<double>? weights, int[] counts, double at, int[] order, double[] distance, int q, LocalRegressionOptions options)
    {
        int taken = 0, last = -1;
        while (taken < q && last < order.Length - 1)
            taken += counts[order[++last]];
        if (last < 0)
            return double.NaN;
        double h = distance[last] * (options.Span > 1 ? options.Span : 1);
        if (!(h > 0))
            return double.NaN;
        double s0 = 0, s1 = 0, s2 = 0, s3 = 0, s4 = 0, t0 = 0, t1 = 0, t2 = 0;
        for (int k = 0; k < order.Length; k++)
        {
            double d = distance[k] / h;
            if (d >= 1)
                break;
            int i = order[k], c = counts[i];
            if (c == 0)
                continue;
            double z = (x[i] - at) / h, cube = 1 - d * d * d, w = c * cube * cube * cube;
            if (weights is not null)
                w *= weights[i];
            double wz = w * z, wz2 = wz * z;
            s0 += w;
            s1 += wz;
            s2 += wz2;
            s3 += wz2 * z;
            s4 += wz2 * z * z;
            t0 += w * y[i];
            t1 += wz * y[i];
            t2 += wz2 * y[i];
        }
        if (!(s0 > 0))
            return double.NaN;
        double ybar = t0 / s0;
        if (options.Degree == 0)
            return ybar;
        double m = s1 / s0, a11 = s2 - s1 * m, b1 = t1 - s1 * ybar;
        if (!(a11 > 1e-10 * s2))
            return double.NaN;
        if (options.Degree == 1)
            return ybar - b1 / a11 * m;
        double m2 = s2 / s0, a12 = s3 - s1 * m2, a22 = s4 - s2 * m2, b2 = t2 - s2 * ybar, rest = a22 - a12 * a12 / a11;
        if (!(rest > 1e-9 * s4))
            return double.NaN;
        double c2 = (b2 - a12 / a11 * b1) / rest, c1 = (b1 - a12 * c2) / a11;
        return ybar - c1 * m - c2 * m2;
    }
}
