using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>Settings of the minimum covariance determinant.</summary>
public sealed record McdOptions
{
    /// <summary>Share of the records that the subset holds, 0.5 to 1. Half is the default: it stands the most wild records.</summary>
    public double Alpha { get; init; } = 0.5;

    /// <summary>Seed of the random subsets.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Random subsets of p + 1 records tried beside the deterministic starts when there are at most <see cref="RandomUpTo"/> records.</summary>
    public int RandomSubsets { get; init; } = 500;

    /// <summary>Most records for which random subsets are tried; the deterministic starts are enough beyond, and much quicker.</summary>
    public int RandomUpTo { get; init; } = 600;
}

/// <summary>Whether there is a robust covariance; read first.</summary>
public enum McdStatus
{
    /// <summary>Center and covariance were found.</summary>
    Found,

    /// <summary>Fewer than 2p + 1 records.</summary>
    TooFew,

    /// <summary>A reading is equal in at least half of the records.</summary>
    Constant,

    /// <summary>At least half of the records lie on a plane of fewer dimensions.</summary>
    OnAPlane,
}

/// <summary>
/// A robust center and covariance. Matrices are p x p. Distances are squared Mahalanobis distances.
/// </summary>
public sealed record McdResult
{
    public required McdStatus Status { get; init; }

    /// <summary>Why there is no covariance; empty when there is.</summary>
    public string Reason { get; init; } = "";

    public required McdOptions Options { get; init; }

    /// <summary>Records.</summary>
    public required int N { get; init; }

    /// <summary>Readings.</summary>
    public required int P { get; init; }

    /// <summary>Records in the subset.</summary>
    public required int H { get; init; }

    /// <summary>The subset of h records whose covariance has the smallest determinant found, 0-based, rising.</summary>
    public int[] Subset { get; init; } = [];

    /// <summary>Logarithm of that determinant (divisor h - 1, no factor).</summary>
    public double LogDeterminant { get; init; } = double.NaN;

    /// <summary>Mean of the subset.</summary>
    public double[] RawCenter { get; init; } = [];

    /// <summary>Covariance of the subset, divisor h - 1, no factor.</summary>
    public double[,] SubsetCovariance { get; init; } = new double[0, 0];

    /// <summary>Consistency factor of the raw covariance.</summary>
    public double RawConsistency { get; init; } = double.NaN;

    /// <summary>Small-sample factor of the raw covariance.</summary>
    public double RawSmallSample { get; init; } = double.NaN;

    /// <summary>Squared distances from the raw center in the raw covariance with both factors, one per record.</summary>
    public double[] RawDistances { get; init; } = [];

    /// <summary>Whether each record entered the reweighted estimate: squared raw distance at most the 97.5 % point of chi-square.</summary>
    public bool[] Kept { get; init; } = [];

    /// <summary>Consistency factor of the reweighted covariance.</summary>
    public double Consistency { get; init; } = double.NaN;

    /// <summary>Small-sample factor of the reweighted covariance.</summary>
    public double SmallSample { get; init; } = double.NaN;

    /// <summary>Reweighted center.</summary>
    public double[] Center { get; init; } = [];

    /// <summary>Reweighted covariance with both factors.</summary>
    public double[,] Covariance { get; init; } = new double[0, 0];

    /// <summary>Squared distances from the reweighted center in the reweighted covariance, one per record.</summary>
    public double[] Distances { get; init; } = [];
}

/// <summary>
/// Minimum covariance determinant: the center and covariance of the half of the records (or a stated share) whose covariance
/// has the smallest determinant, reweighted once. Up to half of the records may be wild.
/// </summary>
/// <remarks>
/// 1. Rousseeuw and Van Driessen (1999), Technometrics 41:212-223: concentration steps. 2. Hubert, Rousseeuw and Verdonck (2012), J. Comput. Graph.
/// Stat. 21:618-637: six deterministic starts. 3. Pison, Van Aelst and Willems (2002): factors for small samples. Found by descent: no other start gave
/// a smaller determinant, which is not a proof that none exists.
/// </remarks>
public static class MinimumCovarianceDeterminant
{
    private const uint SubsetTask = 0x4d43_4401, SampleTask = 0x4d43_4402;

    // beyond this the search runs on a sample of the other size first
    private const int NestedFrom = 20_000, NestedSample = 10_000;

    /// <summary>
    /// Estimates center and covariance. O(n p^2) per concentration step, some dozens of steps from six starts; with at most
    /// 600 records also from 500 random ones; with more than 20,000 the search runs on 10,000 of them before the last steps on all. Unchanged by shifting and
    /// scaling any reading.
    /// </summary>
    /// <param name="readings">p arrays of n finite values.</param>
    /// <exception cref="ArgumentException">Lengths differ, a value is not finite, alpha is out of range.</exception>
    public static McdResult Estimate(IReadOnlyList<double[]> readings, McdOptions? options = null, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        options ??= new McdOptions();
        int p = readings.Count;
        if (p < 1)
            throw new ArgumentException("there must be at least one reading", nameof(readings));
        int n = readings[0].Length;
        if (options.Alpha is not (>= 0.5 and <= 1))
            throw new ArgumentException($"alpha must lie between 0.5 and 1 but is {options.Alpha}", nameof(options));
        for (int j = 0; j < p; j++)
        {
            if (readings[j].Length != n)
                throw new ArgumentException($"reading {j} must have length {n} but has {readings[j].Length}", nameof(readings));
            foreach (double v in readings[j])
                if (!double.IsFinite(v))
                    throw new ArgumentException($"reading {j} holds {v}; values must be finite", nameof(readings));
        }
        int h = McdFactors.SubsetSize(n, p, options.Alpha);
        McdResult Refuse(McdStatus status, string reason) => new() { Status = status, Reason = reason, Options = options, N = n, P = p, H = h };
        if (n < 2 * p + 1 || n < 3)
            return Refuse(McdStatus.TooFew, $"{n} records are too few for {p} readings; at least {Math.Max(3, 2 * p + 1)} are needed.");

        var (points, location, scale) = Standardize(readings, n, p);
        for (int j = 0; j < p; j++)
            if (!(scale[j] > 0))
                return Refuse(McdStatus.Constant, $"Reading {j + 1} has the same value in at least half of the records.");

        var best = p == 1 ? Shortest(points, h) : Search(points, n, p, h, options, cancel, progress);
        if (best is null || double.IsNegativeInfinity(best.LogDeterminant))
            return Refuse(McdStatus.OnAPlane, $"At least {h} of {n} records obey an exact linear relation between the readings; leave one of the readings out.");
        return Finish(readings, points, location, scale, n, p, h, best, options);
    }

    private static (double[] Points, double[] Location, double[] Scale) Standardize(IReadOnlyList<double[]> readings, int n, int p)
    {
        var points = new double[n * p];
        var location = new double[p];
        var scale = new double[p];
        for (int j = 0; j < p; j++)
        {
            double[] x = readings[j];
            location[j] = RobustScale.Median(x);
            double s = n < 1000 ? RobustScale.Qn(x) : RobustScale.Mad(x, location[j]);
            // half of the values at the median, the rest spread: the scale of those that differ still orders the records
            if (!(s > 0))
                s = Spread(x, location[j], n);
            scale[j] = s;
            if (s > 0)
                for (int i = 0; i < n; i++)
                    points[i * p + j] = (x[i] - location[j]) / s;
        }
        return (points, location, scale);
    }

    private static double Spread(double[] x, double center, int n)
    {
        int differ = 0;
        double sum = 0;
        foreach (double v in x)
            if (v != center)
            {
                differ++;
                sum += Math.Abs(v - center);
            }
        return n - differ > n / 2 ? 0 : sum / differ;
    }

    /// <summary>One reading: the contiguous run of h sorted values with the smallest variance is the exact optimum.</summary>
    private static McdSubset? Shortest(double[] points, int h)
    {
        int n = points.Length;
        double[] x = (double[])points.Clone();
        int[] order = [.. Enumerable.Range(0, n)];
        Array.Sort(x, order);
        double best = double.PositiveInfinity;
        int at = 0;
        double mean = 0, squares = 0;
        for (int i = 0; i < h; i++)
        {
            double d = x[i] - mean;
            mean += d / (i + 1);
            squares += d * (x[i] - mean);
        }
        for (int start = 0; ; start++)
        {
            if (squares < best * (1 - 1e-12))
            {
                best = squares;
                at = start;
            }
            if (start + h >= n)
                break;
            double gone = x[start], come = x[start + h], before = mean;
            mean += (come - gone) / h;
            squares += (come - gone) * (come - mean + gone - before);
        }
        int[] subset = order[at..(at + h)];
        Array.Sort(subset);
        return McdSubset.Of(points, n, 1, subset);
    }

    private static McdSubset? Search(double[] points, int n, int p, int h, McdOptions options, CancellationToken cancel, IProgress<double>? progress)
    {
        if (n > NestedFrom)
            return Nested(points, n, p, h, options, cancel, progress);
        var starts = DeterministicStarts.Of(points, n, p, cancel);
        progress?.Report(0.2);
        var ends = new McdSubset?[starts.Count];
        Parallel.For(0, starts.Count, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = n > 5000 ? -1 : 1 }, k =>
            ends[k] = Concentrate(points, n, p, h, starts[k], int.MaxValue, cancel));
        progress?.Report(0.6);
        var best = new List<McdSubset>(ends.OfType<McdSubset>());
        if (n <= options.RandomUpTo && options.RandomSubsets > 0)
        {
            var tried = new List<McdSubset>();
            for (int k = 0; k < options.RandomSubsets; k++)
            {
                if (k % 16 == 0)
                    cancel.ThrowIfCancellationRequested();
                if (RandomStart(points, n, p, options.Seed, k) is { } start && Concentrate(points, n, p, h, start, 2, cancel) is { } two)
                    tried.Add(two);
            }
            foreach (var two in tried.OrderBy(s => s.LogDeterminant).Take(10))
                if (Concentrate(points, n, p, h, two, int.MaxValue, cancel) is { } end)
                    best.Add(end);
        }
        progress?.Report(0.95);
        return best.Count == 0 ? null : best.MinBy(s => s.LogDeterminant);
    }

    /// <summary>
    /// Many records: the search runs on a seeded sample of them (the nested extension of Rousseeuw and Van Driessen 1999, section 3.3); its outcome is then concentrated on all
    /// records, so that every record is judged, and counts in the estimate.
    /// </summary>
    private static McdSubset? Nested(double[] points, int n, int p, int h, McdOptions options, CancellationToken cancel, IProgress<double>? progress)
    {
        var stream = new RandomStream(options.Seed, SampleTask, 0);
        var some = new double[NestedSample * p];
        // one record from each of as many equal stretches, so that a file sorted by anything is sampled evenly
        for (int k = 0; k < NestedSample; k++)
        {
            int from = (int)((long)k * n / NestedSample), to = (int)((long)(k + 1) * n / NestedSample);
            Array.Copy(points, (from + stream.NextInt(to - from)) * p, some, k * p, p);
        }
        var found = Search(some, NestedSample, p, McdFactors.SubsetSize(NestedSample, p, options.Alpha), options, cancel, null);
        progress?.Report(0.5);
        return found is null ? null : Concentrate(points, n, p, h, found, int.MaxValue, cancel, 1e-9);
    }

    /// <summary>p + 1 records drawn at random, more until their covariance can be inverted.</summary>
    private static McdSubset? RandomStart(double[] points, int n, int p, ulong seed, int index)
    {
        var stream = new RandomStream(seed, SubsetTask, (ulong)index);
        int[] order = [.. Enumerable.Range(0, n)];
        for (int i = 0; i < n; i++)
        {
            int j = i + stream.NextInt(n - i);
            (order[i], order[j]) = (order[j], order[i]);
            if (i >= p)
            {
                var subset = McdSubset.Of(points, n, p, order[..(i + 1)]);
                if (!double.IsNegativeInfinity(subset.LogDeterminant))
                    return subset;
            }
        }
        return null;
    }

    /// <summary>
    /// Concentration steps: the h records nearest to the subset's center in its covariance become the next subset; the determinant never rises. Null when the start cannot be used. Stops when the logarithm of the determinant falls by no more than least.
    /// </summary>
    private static McdSubset? Concentrate(double[] points, int n, int p, int h, McdSubset start, int most, CancellationToken cancel, double least = 0)
    {
        var current = start;
        var distances = new double[n];
        var work = new double[n];
        bool sized = false;
        for (int step = 0; step < Math.Min(most, 200); step++)
        {
            cancel.ThrowIfCancellationRequested();
            if (double.IsNegativeInfinity(current.LogDeterminant))
                return sized ? current : null;
            current.Distances(points, n, p, distances);
            var next = McdSubset.Of(points, n, p, Nearest(distances, work, h));
            if (sized && (next.LogDeterminant >= current.LogDeterminant - least || next.SameAs(current)))
                return current;
            current = next;
            sized = true;
        }
        return current;
    }

    /// <summary>The h records with the smallest distances, rising; of equal distances at the edge the earlier records.</summary>
    internal static int[] Nearest(double[] distances, double[] work, int h)
    {
        distances.CopyTo(work, 0);
        double edge = Selection.Smallest(work.AsSpan(0, distances.Length), h - 1);
        int below = 0;
        foreach (double d in distances)
            if (d < edge)
                below++;
        int atEdge = h - below, k = 0;
        var subset = new int[h];
        for (int i = 0; i < distances.Length && k < h; i++)
            if (distances[i] < edge || (distances[i] == edge && atEdge-- > 0))
                subset[k++] = i;
        return subset;
    }

    private static McdResult Finish(IReadOnlyList<double[]> readings, double[] points, double[] location, double[] scale, int n, int p, int h, McdSubset best, McdOptions options)
    {
        double consistency = McdFactors.Consistency(p, (double)h / n), small = McdFactors.RawSmallSample(n, p, options.Alpha);
        if (h == n)
            small = 1;
        var raw = new double[n];
        best.Distances(points, n, p, raw);
        for (int i = 0; i < n; i++)
            raw[i] /= consistency * small;
        double cut = Quantiles.ChiSquare(0.975, p);
        var kept = new bool[n];
        int[] members = [.. Enumerable.Range(0, n).Where(i => kept[i] = raw[i] <= cut)];
        var next = McdSubset.Of(points, n, p, members);
        double nextConsistency = McdFactors.Consistency(p, (double)members.Length / n), nextSmall = h == n ? 1 : McdFactors.ReweightedSmallSample(n, p, options.Alpha);
        var distances = new double[n];
        next.Distances(points, n, p, distances);
        for (int i = 0; i < n; i++)
            distances[i] /= nextConsistency * nextSmall;

        double logScale = 0;
        foreach (double s in scale)
            logScale += Math.Log(s);
        return new McdResult
        {
            Status = McdStatus.Found,
            Options = options,
            N = n,
            P = p,
            H = h,
            Subset = best.Members,
            LogDeterminant = best.LogDeterminant + 2 * logScale,
            RawCenter = Means(readings, best.Members),
            SubsetCovariance = Unscale(best.Covariance, scale, p, 1),
            RawConsistency = consistency,
            RawSmallSample = small,
            RawDistances = raw,
            Kept = kept,
            Consistency = nextConsistency,
            SmallSample = nextSmall,
            Center = Means(readings, members),
            Covariance = Unscale(next.Covariance, scale, p, nextConsistency * nextSmall),
            Distances = distances,
        };
    }

    private static double[] Means(IReadOnlyList<double[]> readings, int[] members) =>
        [.. readings.Select(x =>
        {
            var picked = new double[members.Length];
            for (int k = 0; k < picked.Length; k++)
                picked[k] = x[members[k]];
            return Sums.Mean(picked);
        })];

    private static double[,] Unscale(double[] covariance, double[] scale, int p, double factor)
    {
        var matrix = new double[p, p];
        for (int i = 0; i < p; i++)
            for (int j = 0; j < p; j++)
                matrix[i, j] = covariance[i * p + j] * scale[i] * scale[j] * factor;
        return matrix;
    }
}
