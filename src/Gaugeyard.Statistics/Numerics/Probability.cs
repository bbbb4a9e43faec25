using MathNet.Numerics;
using MathNet.Numerics.Distributions;

namespace Gaugeyard.Statistics.Numerics;

/// <summary>
/// Distribution functions and quantiles used by every procedure, upper tails computed as tails (never as 1 - CDF).
/// Degrees of freedom may be fractional and, for t and for the second ones of F, infinite. Quantiles are polished by
/// Newton steps on these functions, so that they invert them to the last digits.
/// </summary>
public static class Probability
{
    private const int PolishSteps = 4;

    /// <summary>Lower tail of the standard normal.</summary>
    public static double NormalCdf(double z) => 0.5 * SpecialFunctions.Erfc(-z / Math.Sqrt(2));

    /// <summary>Upper tail of the standard normal.</summary>
    public static double NormalUpper(double z) => 0.5 * SpecialFunctions.Erfc(z / Math.Sqrt(2));

    /// <summary>Density of the standard normal.</summary>
    public static double NormalDensity(double z) => Math.Exp(-0.5 * z * z) / Math.Sqrt(2 * Math.PI);

    /// <summary>Quantile of the standard normal; p in (0, 1).</summary>
    public static double NormalQuantile(double p)
    {
        double z = Normal.InvCDF(0, 1, p);
        // one Halley step on the smaller tail
        double error = z <= 0 ? NormalCdf(z) - p : (1 - p) - NormalUpper(z);
        double u = error / NormalDensity(z);
        double step = u / (1 + z * u / 2);
        return double.IsFinite(step) && Math.Abs(step) < 1e-3 ? z - step : z;
    }

    /// <summary>Upper tail of Student's t.</summary>
    public static double StudentUpper(double t, double df)
    {
        if (double.IsPositiveInfinity(df))
            return NormalUpper(t);
        if (double.IsInfinity(t))
            return t > 0 ? 0 : 1;
        double square = t * t;
        if (double.IsPositiveInfinity(square))
            return t > 0 ? 0 : 1;
        double half = 0.5 * IncompleteIntegrals.Beta(df / 2, 0.5, df / (df + square), square / (df + square));
        return t >= 0 ? half : 1 - half;
    }

    /// <summary>Two-sided p-value of Student's t.</summary>
    public static double StudentTwoSided(double t, double df) => Math.Min(1, 2 * StudentUpper(Math.Abs(t), df));

    /// <summary>Quantile of Student's t; p in (0, 1).</summary>
    public static double StudentQuantile(double p, double df)
    {
        if (double.IsPositiveInfinity(df))
            return NormalQuantile(p);
        if (p == 0.5)
            return 0;
        if (p < 0.5)
            return -UpperStudentQuantile(p, df);
        return UpperStudentQuantile(1 - p, df);
    }

    private static double UpperStudentQuantile(double tail, double df)
    {
        if (df == 1)
            return 1 / Math.Tan(Math.PI * tail);
        if (df == 2)
            return (1 - 2 * tail) * Math.Sqrt(2 / (4 * tail * (1 - tail)));
        // bracket and Newton on the logarithm of the tail, which is smooth and monotone
        double low = 0, high = 2;
        while (StudentUpper(high, df) > tail)
        {
            low = high;
            high *= 2;
            if (high > 1e300)
                return high;
        }
        double t = 0.5 * (low + high);
        double logDensity = SpecialFunctions.GammaLn((df + 1) / 2) - SpecialFunctions.GammaLn(df / 2) - 0.5 * Math.Log(df * Math.PI);
        for (int i = 0; i < 100; i++)
        {
            double upper = StudentUpper(t, df);
            if (upper > tail)
                low = t;
            else
                high = t;
            double density = Math.Exp(logDensity - (df + 1) / 2 * Math.Log(1 + t * t / df));
            double next = t + upper * Math.Log(upper / tail) / density;
            if (!(next > low && next < high))
                next = 0.5 * (low + high);
            if (Math.Abs(next - t) <= 1e-15 * t)
                return next;
            t = next;
        }
        return t;
    }

    /// <summary>Upper tail of F.</summary>
    public static double FisherUpper(double f, double df1, double df2)
    {
        if (f <= 0)
            return 1;
        if (double.IsPositiveInfinity(f))
            return 0;
        return double.IsPositiveInfinity(df2)
            ? ChiSquareUpper(f * df1, df1)
            : IncompleteIntegrals.Beta(df2 / 2, df1 / 2, df2 / (df2 + df1 * f), df1 * f / (df2 + df1 * f));
    }

    /// <summary>Quantile of F; p in (0, 1).</summary>
    public static double FisherQuantile(double p, double df1, double df2) => p < 0.5
        ? Solve(x => -FisherCdf(x, df1, df2), -p, 1)
        : Solve(x => FisherUpper(x, df1, df2), 1 - p, 1);

    /// <summary>Lower tail of F.</summary>
    public static double FisherCdf(double f, double df1, double df2)
    {
        if (f <= 0)
            return 0;
        if (double.IsPositiveInfinity(f))
            return 1;
        return double.IsPositiveInfinity(df2)
            ? ChiSquareCdf(f * df1, df1)
            : IncompleteIntegrals.Beta(df1 / 2, df2 / 2, df1 * f / (df2 + df1 * f), df2 / (df2 + df1 * f));
    }

    /// <summary>Upper tail of chi-square.</summary>
    public static double ChiSquareUpper(double x, double df) => x <= 0 ? 1 : IncompleteIntegrals.GammaUpper(df / 2, x / 2);

    /// <summary>Lower tail of chi-square.</summary>
    public static double ChiSquareCdf(double x, double df) => x <= 0 ? 0 : IncompleteIntegrals.GammaLower(df / 2, x / 2);

    /// <summary>Quantile of chi-square; p in (0, 1).</summary>
    public static double ChiSquareQuantile(double p, double df) => p < 0.5
        ? Solve(x => -ChiSquareCdf(x, df), -p, df)
        : Solve(x => ChiSquareUpper(x, df), 1 - p, df);

    // positive x at which a falling function equals a value: geometric, then plain bisection
    private static double Solve(Func<double, double> upper, double tail, double start)
    {
        double low = start, high = start;
        while (upper(low) < tail && low > 1e-300)
            low /= 2;
        while (upper(high) > tail && high < 1e300)
            high *= 2;
        for (int i = 0; i < 200 && high - low > 1e-15 * high; i++)
        {
            double mid = i < PolishSteps ? Math.Sqrt(low * high) : 0.5 * (low + high);
            if (upper(mid) > tail)
                low = mid;
            else
                high = mid;
        }
        return 0.5 * (low + high);
    }
}
