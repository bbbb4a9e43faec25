namespace Gaugeyard.Statistics.Outliers;

/// <summary>A subset of records with its mean and covariance (divisor size - 1), points row-major and standardized.</summary>
internal sealed class McdSubset
{
    private double[]? _whiten;

    private McdSubset(int[] members, double[] mean, double[] covariance, double logDeterminant)
    {
        Members = members;
        Mean = mean;
        Covariance = covariance;
        LogDeterminant = logDeterminant;
    }

    public int[] Members { get; }

    public double[] Mean { get; }

    public double[] Covariance { get; }

    /// <summary>Negative infinity when the covariance cannot be inverted.</summary>
    public double LogDeterminant { get; }

    public static McdSubset Of(double[] points, int n, int p, int[] members)
    {
        var mean = new double[p];
        foreach (int i in members)
            for (int j = 0; j < p; j++)
                mean[j] += points[i * p + j];
        for (int j = 0; j < p; j++)
            mean[j] /= members.Length;
        var covariance = new double[p * p];
        var d = new double[p];
        foreach (int i in members)
        {
            for (int j = 0; j < p; j++)
                d[j] = points[i * p + j] - mean[j];
            for (int j = 0; j < p; j++)
                for (int k = 0; k <= j; k++)
                    covariance[j * p + k] += d[j] * d[k];
        }
        for (int j = 0; j < p; j++)
            for (int k = 0; k <= j; k++)
                covariance[k * p + j] = covariance[j * p + k] /= members.Length - 1;
        return new McdSubset(members, mean, covariance, members.Length > p ? SmallMatrix.LogDeterminant(covariance, p) : double.NegativeInfinity);
    }

    /// <summary>A center and shape that no subset has been chosen for yet.</summary>
    public static McdSubset Shape(double[] mean, double[] covariance, int p) => new([], mean, covariance, SmallMatrix.LogDeterminant(covariance, p));

    /// <summary>Squared Mahalanobis distances of all records; the covariance must be positive definite.</summary>
    public void Distances(double[] points, int n, int p, double[] distances)
    {
        if (_whiten is null)
        {
            double[] l = (double[])Covariance.Clone();
            if (!SmallMatrix.Cholesky(l, p))
                throw new InvalidOperationException("the covariance is singular");
            _whiten = SmallMatrix.InvertLower(l, p);
        }
        double[] w = _whiten, mean = Mean;
        Span<double> d = p <= 64 ? stackalloc double[p] : new double[p];
        for (int i = 0; i < n; i++)
        {
            for (int j = 0; j < p; j++)
                d[j] = points[i * p + j] - mean[j];
            double sum = 0;
            for (int j = 0; j < p; j++)
            {
                double z = 0;
                for (int k = 0; k <= j; k++)
                    z += w[j * p + k] * d[k];
                sum += z * z;
            }
            distances[i] = sum;
        }
    }

    public bool SameAs(McdSubset other) => Members.AsSpan().SequenceEqual(other.Members);
}
