using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// Quantiles to full double precision: a library value as the start, then bisection-guarded secant steps on the upper tail, since cuts
/// and consistency factors are compared to 13 digits.
/// </summary>
internal static class Quantiles
{
    /// <summary>Quantile of chi-square; p in (0, 1).</summary>
    public static double ChiSquare(double p, double df) => Invert(x => Probability.ChiSquareUpper(x, df), 1 - p, Probability.ChiSquareQuantile(p, df));

    /// <summary>The value that F exceeds with probability tail in (0, 1).</summary>
    public static double FisherAbove(double tail, double df1, double df2) =>
        Invert(x => Probability.FisherUpper(x, df1, df2), tail, 1);

    private static double Invert(Func<double, double> upper, double tail, double start)
    {
        double low = start > 0 && double.IsFinite(start) ? start : 1, high = low;
        while (upper(low) < tail && low > 1e-300)
            low /= 1.01 + Math.Min(8, high / low - 1);
        while (upper(high) > tail && high < 1e300)
            high *= 1.01 + Math.Min(8, high / low - 1);
        // Brent's zero finder on ln(upper) would be quicker; regula falsi with halving (Illinois) is short and sure
        double fl = Math.Log(upper(low) / tail), fh = Math.Log(upper(high) / tail);
        for (int i = 0; i < 200 && high - low > 4e-16 * high; i++)
        {
            double x = fl == fh ? (low + high) / 2 : (low * fh - high * fl) / (fh - fl);
            if (!(x > low && x < high))
                x = (low + high) / 2;
            if (!(x > low && x < high))
                break;
            double f = Math.Log(upper(x) / tail);
            if (f == 0)
                return x;
            if (f > 0)
            {
                low = x;
                fl = f;
                fh /= 2;
            }
            else
            {
                high = x;
                fh = f;
                fl /= 2;
            }
            if (Math.Abs(f) < 2e-16)
                return x;
        }
        return Math.Abs(Math.Log(upper(low) / tail)) < Math.Abs(Math.Log(upper(high) / tail)) ? low : high;
    }
}
