namespace Gaugeyard.Statistics.Describing;

/// <summary>
/// Count, mean and sums of powers of deviations up to the fourth. Moments of parts merge exactly to those of the whole
/// (Chan, Golub and LeVeque 1983, The American Statistician 37:242-247; orders 3 and 4 by Pebay 2008, SAND2008-6212), so that
/// data can be taken in blocks. Immutable value; the default is the moments of nothing.
/// </summary>
/// <param name="Count">Number of values.</param>
/// <param name="Mean">Arithmetic mean; 0 when empty.</param>
/// <param name="M2">Sum of squared deviations.</param>
/// <param name="M3">Sum of cubed deviations.</param>
/// <param name="M4">Sum of fourth powers of deviations.</param>
public readonly record struct Moments(long Count, double Mean, double M2, double M3, double M4)
{
    private const int Block = 65_536;

    /// <summary>Moments of finite values, block by block so that the result does not depend on how work is shared out. O(n).</summary>
    public static Moments Of(ReadOnlySpan<double> values)
    {
        var all = default(Moments);
        for (int start = 0; start < values.Length; start += Block)
            all = Merge(all, OfBlock(values.Slice(start, Math.Min(Block, values.Length - start))));
        return all;
    }

    private static Moments OfBlock(ReadOnlySpan<double> values)
    {
        double mean = Numerics.Sums.Mean(values);
        // compensated sums of powers; the first power corrects the rounding of the mean (Bjorck's two-pass form)
        double s1 = 0, s2 = 0, c2 = 0, s3 = 0, c3 = 0, s4 = 0, c4 = 0;
        foreach (double v in values)
        {
            double d = v - mean, square = d * d;
            s1 += d;
            Add(ref s2, ref c2, square);
            Add(ref s3, ref c3, square * d);
            Add(ref s4, ref c4, square * square);
        }
        double m2 = s2 + c2 - s1 * s1 / values.Length;
        return new Moments(values.Length, mean, Math.Max(0, m2), s3 + c3, s4 + c4);
    }

    private static void Add(ref double sum, ref double lost, double value)
    {
        double next = sum + value;
        lost += Math.Abs(sum) >= Math.Abs(value) ? sum - next + value : value - next + sum;
        sum = next;
    }

    /// <summary>Moments of two parts together.</summary>
    public static Moments Merge(Moments a, Moments b)
    {
        if (a.Count == 0)
            return b;
        if (b.Count == 0)
            return a;
        double na = a.Count, nb = b.Count, n = na + nb, d = b.Mean - a.Mean, dn = d / n;
        double m2 = a.M2 + b.M2 + d * dn * na * nb;
        double m3 = a.M3 + b.M3 + d * dn * dn * na * nb * (na - nb) + 3 * dn * (na * b.M2 - nb * a.M2);
        double m4 = a.M4 + b.M4 + d * dn * dn * dn * na * nb * (na * na - na * nb + nb * nb)
            + 6 * dn * dn * (na * na * b.M2 + nb * nb * a.M2) + 4 * dn * (na * b.M3 - nb * a.M3);
        return new Moments(a.Count + b.Count, (na * a.Mean + nb * b.Mean) / n, m2, m3, m4);
    }

    /// <summary>Variance with divisor n - 1; NaN below two values.</summary>
    public double Variance => Count < 2 ? double.NaN : M2 / (Count - 1);

    /// <summary>Standard deviation with divisor n - 1; NaN below two values.</summary>
    public double StandardDeviation => Math.Sqrt(Variance);

    /// <summary>Skewness, adjusted Fisher-Pearson G1 (Joanes and Gill 1998); NaN below three values or without spread.</summary>
    public double Skewness
    {
        get
        {
            if (Count < 3 || M2 == 0)
                return double.NaN;
            double n = Count, g1 = Math.Sqrt(n) * M3 / Math.Pow(M2, 1.5);
            return g1 * Math.Sqrt(n * (n - 1)) / (n - 2);
        }
    }

    /// <summary>Excess kurtosis G2 (Joanes and Gill 1998, The Statistician 47:183-189); NaN below four values or without spread.</summary>
    public double ExcessKurtosis
    {
        get
        {
            if (Count < 4 || M2 == 0)
                return double.NaN;
            double n = Count, g2 = n * M4 / (M2 * M2) - 3;
            return (n - 1) / ((n - 2) * (n - 3)) * ((n + 1) * g2 + 6);
        }
    }
}
