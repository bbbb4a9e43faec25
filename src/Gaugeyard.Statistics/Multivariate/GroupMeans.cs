using Gaugeyard.Statistics.Numerics;
using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Multivariate;

/// <summary>One of the four multivariate statistics with its F approximation.</summary>
public sealed record MultivariateStatistic(double Value, double F, double Df1, double Df2, double P);

/// <summary>One canonical variate.</summary>
/// <param name="Eigenvalue">Of E^-1 H.</param>
/// <param name="Correlation">Canonical correlation.</param>
/// <param name="Coefficients">Per reading, scaled so that the variate has within-group variance 1.</param>
/// <param name="Scores">Mean score of each group, about the grand mean.</param>
public sealed record CanonicalVariate(double Eigenvalue, double Correlation, double[] Coefficients, double[] Scores);

/// <summary>Squared distances of two group means.</summary>
public sealed record GroupDistance(int A, int B, double D, double D2Unbiased);

/// <summary>Result of the multivariate comparison of groups; read Reason first.</summary>
public sealed record MultivariateResult(
    string? Reason, MultivariateStatistic? Pillai, MultivariateStatistic? Wilks, MultivariateStatistic? HotellingLawley, MultivariateStatistic? Roy,
    IReadOnlyList<CanonicalVariate> Canonical, IReadOnlyList<GroupDistance> Distances);

/// <summary>
/// Multivariate analysis of variance, one way (Pillai 1955; Wilks 1932 with Rao's 1951 F; Hotelling-Lawley; Roy, whose F is an
/// upper bound), canonical variates and Mahalanobis distances of group means by the pooled within-group covariance.
/// </summary>
public static class MultivariateComparison
{
    /// <summary>Compares groups on several readings.</summary>
    /// <param name="rows">n rows of p finite readings.</param>
    /// <param name="groups">Group code 0 .. g-1 of each row; every group occurs.</param>
    /// <param name="groupCount">Number of groups g.</param>
    public static MultivariateResult Of(IReadOnlyList<double[]> rows, ReadOnlySpan<int> groups, int groupCount)
    {
        if (rows.Count != groups.Length)
            throw new ArgumentException($"groups must have length {rows.Count} but has {groups.Length}", nameof(groups));
        int n = rows.Count, p = n == 0 ? 0 : rows[0].Length, dfH = groupCount - 1, dfE = n - groupCount;
        if (groupCount < 2)
            return Refused("Only one group has records with all readings.");
        if (dfE < p)
            return Refused($"{n} records in {groupCount} groups are too few for {p} readings: at least {groupCount + p} are needed.");
        var (h, e, means, sizes, scale) = Products(rows, groups, groupCount);
        if (scale.Any(s => s == 0))
            return Refused("A reading does not vary within any group.");
        Matrix<double> lower;
        try
        {
            lower = e.Cholesky().Factor;
        }
        catch (ArgumentException)
        {
            return Refused("Some readings are exact combinations of others. Take one of them out.");
        }
        if (Enumerable.Range(0, p).Any(i => lower[i, i] < 1e-7))
            return Refused("Some readings are exact combinations of others. Take one of them out.");
        var inverse = lower.Inverse();
        var spectrum = (inverse * h * inverse.Transpose()).Evd(Symmetricity.Symmetric);
        int s = Math.Min(p, dfH);
        int[] order = [.. Enumerable.Range(0, p).OrderByDescending(i => spectrum.EigenValues[i].Real).Take(s)];
        double[] roots = [.. order.Select(i => Math.Max(0, spectrum.EigenValues[i].Real))];
        var canonical = new List<CanonicalVariate>();
        foreach (var (i, root) in order.Zip(roots))
        {
            var direction = inverse.Transpose() * spectrum.EigenVectors.Column(i) * Math.Sqrt(dfE);
            // sign: the largest coefficient is positive, so that the picture does not flip between runs
            if (direction[direction.AbsoluteMaximumIndex()] < 0)
                direction = -direction;
            double[] scores = [.. Enumerable.Range(0, groupCount).Select(g => direction * means.Row(g))];
            canonical.Add(new CanonicalVariate(root, Math.Sqrt(root / (1 + root)), [.. direction.Select((c, j) => c / scale[j])], scores));
        }
        return new MultivariateResult(null, Pillai(roots, p, dfH, dfE), Wilks(roots, p, dfH, dfE), HotellingLawley(roots, p, dfH, dfE), Roy(roots, p, dfH, dfE),
            canonical, Distances(means, inverse, sizes, dfE, p));
    }

    private static MultivariateResult Refused(string reason) => new(reason, null, null, null, null, [], []);

    /// <summary>Pillai's trace alone, for permutation tests.</summary>
    internal static double PillaiTrace(Matrix<double> h, Matrix<double> total) => total.Cholesky().Solve(h).Trace();

    // sums of squares and products of readings scaled to unit within-group root sum of squares; means about the grand mean
    private static (Matrix<double> H, Matrix<double> E, Matrix<double> Means, double[] Sizes, double[] Scale) Products(IReadOnlyList<double[]> rows, ReadOnlySpan<int> groups, int groupCount)
    {
        int n = rows.Count, p = rows[0].Length;
        var grand = new double[p];
        foreach (double[] row in rows)
            for (int j = 0; j < p; j++)
                grand[j] += row[j] / n;
        var means = Matrix<double>.Build.Dense(groupCount, p);
        var sizes = new double[groupCount];
        for (int i = 0; i < n; i++)
        {
            sizes[groups[i]]++;
            for (int j = 0; j < p; j++)
                means[groups[i], j] += rows[i][j] - grand[j];
        }
        for (int g = 0; g < groupCount; g++)
            for (int j = 0; j < p; j++)
                means[g, j] /= sizes[g];
        var e = Matrix<double>.Build.Dense(p, p);
        var d = new double[p];
        for (int i = 0; i < n; i++)
        {
            for (int j = 0; j < p; j++)
                d[j] = rows[i][j] - grand[j] - means[groups[i], j];
            for (int j = 0; j < p; j++)
                for (int k = 0; k <= j; k++)
                    e[j, k] += d[j] * d[k];
        }
        double[] scale = [.. Enumerable.Range(0, p).Select(j => Math.Sqrt(e[j, j]))];
        for (int j = 0; j < p; j++)
            for (int k = 0; k <= j; k++)
                e[j, k] = e[k, j] = e[j, k] / (scale[j] * scale[k]);
        for (int g = 0; g < groupCount; g++)
            for (int j = 0; j < p; j++)
                means[g, j] /= scale[j];
        var h = Matrix<double>.Build.Dense(p, p);
        for (int g = 0; g < groupCount; g++)
            for (int j = 0; j < p; j++)
                for (int k = 0; k < p; k++)
                    h[j, k] += sizes[g] * means[g, j] * means[g, k];
        return (h, e, means, sizes, scale);
    }

    private static MultivariateStatistic Pillai(double[] roots, int p, int dfH, int dfE)
    {
        double v = roots.Sum(r => r / (1 + r)), s = Math.Min(p, dfH), m = (Math.Abs(p - dfH) - 1) / 2.0, n = (dfE - p - 1) / 2.0;
        double df1 = s * (2 * m + s + 1), df2 = s * (2 * n + s + 1), f = (2 * n + s + 1) / (2 * m + s + 1) * v / (s - v);
        return new MultivariateStatistic(v, f, df1, df2, Probability.FisherUpper(f, df1, df2));
    }

    private static MultivariateStatistic Wilks(double[] roots, int p, int dfH, int dfE)
    {
        double logLambda = -roots.Sum(r => Math.Log(1 + r)), lambda = Math.Exp(logLambda);
        double w = dfE + dfH - (p + dfH + 1) / 2.0, q = p * p + dfH * dfH - 5;
        double t = q > 0 ? Math.Sqrt((p * p * (double)dfH * dfH - 4) / q) : 1, df1 = p * (double)dfH, df2 = w * t - (df1 - 2) / 2;
        double root = Math.Exp(logLambda / t), f = (1 - root) / root * df2 / df1;
        return new MultivariateStatistic(lambda, f, df1, df2, Probability.FisherUpper(f, df1, df2));
    }

    private static MultivariateStatistic HotellingLawley(double[] roots, int p, int dfH, int dfE)
    {
        double u = roots.Sum(), s = Math.Min(p, dfH), m = (Math.Abs(p - dfH) - 1) / 2.0, n = (dfE - p - 1) / 2.0;
        double df1 = s * (2 * m + s + 1), df2 = 2 * (s * n + 1), f = df2 * u / (s * df1);
        return new MultivariateStatistic(u, f, df1, df2, df2 > 0 ? Probability.FisherUpper(f, df1, df2) : double.NaN);
    }

    private static MultivariateStatistic Roy(double[] roots, int p, int dfH, int dfE)
    {
        double df1 = Math.Max(p, dfH), df2 = dfE - df1 + dfH, f = roots[0] * df2 / df1;
        return new MultivariateStatistic(roots[0], f, df1, df2, df2 > 0 ? Probability.FisherUpper(f, df1, df2) : double.NaN);
    }

    private static List<GroupDistance> Distances(Matrix<double> means, Matrix<double> inverse, double[] sizes, int dfE, int p)
    {
        var distances = new List<GroupDistance>();
        for (int a = 0; a < means.RowCount; a++)
            for (int b = a + 1; b < means.RowCount; b++)
            {
                double d2 = dfE * Math.Pow((inverse * (means.Row(b) - means.Row(a))).L2Norm(), 2);
                double unbiased = Math.Max(0, (dfE - p - 1.0) / dfE * d2 - p * (1 / sizes[a] + 1 / sizes[b]));
                distances.Add(new GroupDistance(a, b, Math.Sqrt(d2), unbiased));
            }
        return distances;
    }
}
