using MathNet.Numerics;
using MathNet.Numerics.Distributions;

namespace Gaugeyard.Statistics.Numerics;

/// <summary>
/// Distribution functions and quantiles used by every procedure, upper tails computed as tails (never as 1 - CDF).
/// Degrees of freedom may be fractional and, for t and for the second ones of F, infinite.
/// </summary>
public static class Probability
{
    /// <summary>Lower tail of the standard normal.</summary>
    public static double NormalCdf(double z) => 0.5 * SpecialFunctions.Erfc(-z / Math.Sqrt(2));

    /// <summary>Upper tail of the standard normal.</summary>
    public static double NormalUpper(double z) => 0.5 * SpecialFunctions.Erfc(z / Math.Sqrt(2));

    /// <summary>Quantile of the standard normal; p in (0, 1).</summary>
    public static double NormalQuantile(double p) => Normal.InvCDF(0, 1, p);

    /// <summary>Upper tail of Student's t.</summary>
    public static double StudentUpper(double t, double df)
    {
        if (double.IsPositiveInfinity(df))
            return NormalUpper(t);
        double half = 0.5 * SpecialFunctions.BetaRegularized(df / 2, 0.5, df / (df + t * t));
        return t >= 0 ? half : 1 - half;
    }

    /// <summary>Two-sided p-value of Student's t.</summary>
    public static double StudentTwoSided(double t, double df) => Math.Min(1, 2 * StudentUpper(Math.Abs(t), df));

    /// <summary>Quantile of Student's t; p in (0, 1).</summary>
    public static double StudentQuantile(double p, double df) =>
        double.IsPositiveInfinity(df) ? NormalQuantile(p) : StudentT.InvCDF(0, 1, df, p);

    /// <summary>Upper tail of F.</summary>
    public static double FisherUpper(double f, double df1, double df2)
    {
        if (f <= 0)
            return 1;
        if (double.IsPositiveInfinity(f))
            return 0;
        return double.IsPositiveInfinity(df2)
            ? ChiSquareUpper(f * df1, df1)
            : SpecialFunctions.BetaRegularized(df2 / 2, df1 / 2, df2 / (df2 + df1 * f));
    }

    /// <summary>Quantile of F; p in (0, 1).</summary>
    public static double FisherQuantile(double p, double df1, double df2) => FisherSnedecor.InvCDF(df1, df2, p);

    /// <summary>Upper tail of chi-square.</summary>
    public static double ChiSquareUpper(double x, double df) => x <= 0 ? 1 : SpecialFunctions.GammaUpperRegularized(df / 2, x / 2);

    /// <summary>Quantile of chi-square; p in (0, 1).</summary>
    public static double ChiSquareQuantile(double p, double df) => ChiSquared.InvCDF(df, p);
}
