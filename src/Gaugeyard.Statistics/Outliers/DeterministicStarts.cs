using Gaugeyard.Statistics.Comparing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// The six starts of Hubert, Rousseeuw and Verdonck (2012): shapes that a minority of wild records can bend but not break, each made
/// orthogonal and given robust scales, then the half of the records nearest to it. Points are row-major, standardized by median and scale.
/// </summary>
internal static class DeterministicStarts
{
    public static List<McdSubset> Of(double[] points, int n, int p, CancellationToken cancel)
    {
        var columns = new double[p][];
        for (int j = 0; j < p; j++)
        {
            columns[j] = new double[n];
            for (int i = 0; i < n; i++)
                columns[j][i] = points[i * p + j];
        }
        var starts = new List<McdSubset>(6);
        void Add(double[] shape)
        {
            cancel.ThrowIfCancellationRequested();
            if (FromShape(points, columns, shape, n, p) is { } start)
                starts.Add(start);
        }

        Add(Covariance([.. columns.Select(c => Array.ConvertAll(c, Math.Tanh))], n));
        double[][] ranks = [.. columns.Select(c => Ranks.Of(c).Ranks)];
        Add(Correlation(ranks, n));
        Add(Correlation([.. ranks.Select(r => Array.ConvertAll(r, x => Probability.NormalQuantile((x - 1.0 / 3) / (n + 1.0 / 3))))], n));
        Add(SpatialSign(points, n, p));
        Add(NearOrigin(points, n, p));
        if (GnanadesikanKettenring(columns, n, p) is { } paired)
            Add(paired);
        return starts;
    }

    private static double Scale(ReadOnlySpan<double> x, int n) => n < 1000 ? RobustScale.Qn(x) : RobustScale.Tau(x);

    /// <summary>Orthogonal directions of the shape, robust scale along each, coordinatewise median of the whitened points, nearest half.</summary>
    private static McdSubset? FromShape(double[] points, double[][] columns, double[] shape, int n, int p)
    {
        double[] e = SmallMatrix.Eigenvectors(shape, p);
        var along = new double[n];
        var scale = new double[p];
        var middle = new double[p];
        // whitened coordinates in the eigenbasis; turning them back by E does not move distances but does move the coordinatewise median
        var white = new double[p][];
        for (int j = 0; j < p; j++)
        {
            Array.Clear(along);
            for (int k = 0; k < p; k++)
            {
                double w = e[k * p + j];
                double[] c = columns[k];
                for (int i = 0; i < n; i++)
                    along[i] += w * c[i];
            }
            scale[j] = Scale(along, n);
            if (!(scale[j] > 1e-12))
                return null;
            white[j] = new double[n];
            for (int i = 0; i < n; i++)
                white[j][i] = along[i] / scale[j];
        }
        for (int j = 0; j < p; j++)
        {
            Array.Clear(along);
            for (int k = 0; k < p; k++)
            {
                double w = e[j * p + k];
                double[] c = white[k];
                for (int i = 0; i < n; i++)
                    along[i] += w * c[i];
            }
            middle[j] = RobustScale.Median(along);
        }
        // in the eigenbasis the median is E' middle
        var center = new double[p];
        for (int k = 0; k < p; k++)
            for (int j = 0; j < p; j++)
                center[k] += e[j * p + k] * middle[j];
        var distances = new double[n];
        for (int i = 0; i < n; i++)
            for (int k = 0; k < p; k++)
            {
                double d = white[k][i] - center[k];
                distances[i] += d * d;
            }
        var start = McdSubset.Of(points, n, p, MinimumCovarianceDeterminant.Nearest(distances, new double[n], (n + 1) / 2));
        return double.IsNegativeInfinity(start.LogDeterminant) ? null : start;
    }

    private static double[] Covariance(double[][] columns, int n)
    {
        int p = columns.Length;
        var means = columns.Select(c => Sums.Mean(c)).ToArray();
        var s = new double[p * p];
        for (int j = 0; j < p; j++)
            for (int k = 0; k <= j; k++)
            {
                double sum = 0;
                double[] a = columns[j], b = columns[k];
                for (int i = 0; i < n; i++)
                    sum += (a[i] - means[j]) * (b[i] - means[k]);
                s[j * p + k] = s[k * p + j] = sum / n;
            }
        return Correlate(s, p);
    }

    private static double[] Correlation(double[][] columns, int n) => Covariance(columns, n);

    private static double[] Correlate(double[] s, int p)
    {
        var r = new double[p * p];
        for (int j = 0; j < p; j++)
            for (int k = 0; k < p; k++)
                r[j * p + k] = j == k ? 1 : s[j * p + j] > 0 && s[k * p + k] > 0 ? s[j * p + k] / Math.Sqrt(s[j * p + j] * s[k * p + k]) : 0;
        return r;
    }

    private static double[] SpatialSign(double[] points, int n, int p)
    {
        var s = new double[p * p];
        for (int i = 0; i < n; i++)
        {
            double norm = 0;
            for (int j = 0; j < p; j++)
                norm += points[i * p + j] * points[i * p + j];
            if (norm == 0)
                continue;
            for (int j = 0; j < p; j++)
                for (int k = 0; k < p; k++)
                    s[j * p + k] += points[i * p + j] * points[i * p + k] / norm;
        }
        return s;
    }

    /// <summary>Covariance of the half nearest to the medians: the first step of Billor, Hadi and Velleman (2000).</summary>
    private static double[] NearOrigin(double[] points, int n, int p)
    {
        var norms = new double[n];
        for (int i = 0; i < n; i++)
            for (int j = 0; j < p; j++)
                norms[i] += points[i * p + j] * points[i * p + j];
        return McdSubset.Of(points, n, p, MinimumCovarianceDeterminant.Nearest(norms, new double[n], (n + 1) / 2)).Covariance;
    }

    /// <summary>Pairwise covariances from robust scales of sums and differences (Gnanadesikan and Kettenring 1972; Maronna and Zamar 2002), before orthogonalization.</summary>
    private static double[]? GnanadesikanKettenring(double[][] columns, int n, int p)
    {
        var u = new double[p * p];
        var work = new double[n];
        for (int j = 0; j < p; j++)
        {
            u[j * p + j] = 1;
            for (int k = 0; k < j; k++)
            {
                double[] a = columns[j], b = columns[k];
                double sa = Scale(a, n), sb = Scale(b, n);
                if (!(sa > 0 && sb > 0))
                    return null;
                for (int i = 0; i < n; i++)
                    work[i] = a[i] / sa + b[i] / sb;
                double sum = Scale(work, n);
                for (int i = 0; i < n; i++)
                    work[i] = a[i] / sa - b[i] / sb;
                double difference = Scale(work, n);
                u[j * p + k] = u[k * p + j] = (sum * sum - difference * difference) / 4;
            }
        }
        return u;
    }
}
