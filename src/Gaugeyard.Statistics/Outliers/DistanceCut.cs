using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// Distribution of squared robust distances of records that were not in the subset: a scaled F (Hardin and Rocke 2005, J. Comput.
/// Graph. Stat. 14:928-946), with the degrees of freedom of Green and Martin (2017) for subsets of any size. Applies to distances from the raw minimum
/// covariance determinant with both of its factors.
/// </summary>
public static class DistanceCut
{
    /// <summary>
    /// Asymptotic degrees of freedom m of the Wishart approximation of the subset's scatter (Croux and Haesbroeck 1999).
    /// </summary>
    /// <param name="n">Records.</param>
    /// <param name="p">Readings.</param>
    /// <param name="h">Records in the subset, at most n.</param>
    public static double AsymptoticDegreesOfFreedom(int n, int p, int h)
    {
        Check(n, p, h);
        if (h == n)
            return n - 1;
        double a = (double)h / n, q = Quantiles.ChiSquare(a, p);
        double big = 1 - Probability.ChiSquareUpper(q, p + 2), c = a / big, c3 = -(1 - Probability.ChiSquareUpper(q, p + 4)) / 2;
        double b1 = -2 * c3 / big, b2 = 0.5 + (c3 - q * (a - big) / (2 * p)) / big, z = b1 - p * b2;
        double kept = c * q / p - 1;
        double v1 = a * b1 * b1 * ((1 - a) * kept * kept - 1) - 2 * c3 * c * c * (3 * z * z + (p + 2) * b2 * (b1 + z));
        double v2 = n * c * c * (b1 * z * a) * (b1 * z * a);
        return 2 * v2 / (c * c * v1);
    }

    /// <summary>
    /// Degrees of freedom m for a sample of size n: the asymptotic ones times a correction found by simulation.
    /// </summary>
    /// <param name="alpha">Share of the records that the subset was asked to hold, 0.5 to 1; 0.5 is the largest breakdown point.</param>
    public static double DegreesOfFreedom(int n, int p, double alpha = 0.5)
    {
        double asymptotic = AsymptoticDegreesOfFreedom(n, p, McdFactors.SubsetSize(n, p, alpha));
        return alpha <= 0.5
            ? asymptotic * Math.Exp(0.725 - 0.00663 * p - 0.0780 * Math.Log(n))
            : asymptotic * Math.Exp((12.745653 - 14.545559 * alpha + 0.1274 * p) / Math.Pow(n, 0.559217 + 0.14904 * alpha));
    }

    /// <summary>Chance that a record like the others lies at this squared distance or farther; m must exceed p - 1.</summary>
    public static double UpperTail(double squaredDistance, int p, double m)
    {
        Check(p, m);
        return Probability.FisherUpper(squaredDistance * (m - p + 1) / (p * m), p, m - p + 1);
    }

    /// <summary>The squared distance that a record like the others exceeds with probability tail.</summary>
    public static double SquaredDistance(double tail, int p, double m)
    {
        Check(p, m);
        if (tail is not (> 0 and < 1))
            throw new ArgumentOutOfRangeException(nameof(tail), tail, "tail must lie between 0 and 1");
        return p * m / (m - p + 1) * Quantiles.FisherAbove(tail, p, m - p + 1);
    }

    private static void Check(int p, double m)
    {
        if (!(m > p - 1))
            throw new ArgumentException($"m must exceed p - 1 = {p - 1} but is {m}", nameof(m));
    }

    private static void Check(int n, int p, int h)
    {
        if (p < 1)
            throw new ArgumentOutOfRangeException(nameof(p), p, "there must be at least one reading");
        if (h < 2 || h > n)
            throw new ArgumentException($"h must lie between 2 and n = {n} but is {h}", nameof(h));
    }
}
