using MathNet.Numerics;

namespace Gaugeyard.Statistics.Numerics;

/// <summary>
/// Regularized incomplete beta and gamma functions with small relative error in both tails and for large parameters. The factor in
/// front is written by deviances and the error of Stirling's formula (Loader 2000, "Fast and accurate computation of binomial
/// probabilities"), since differences of log gammas lose a digit with every tenfold of the degrees of freedom; the rest is
/// a continued fraction (DiDonato and Morris 1992, ACM Transactions on Mathematical Software 18:360-373; evaluated by Lentz's method)
/// or a series.
/// </summary>
internal static class IncompleteIntegrals
{
    private const int MostTerms = 2_000_000;
    private const double Tiny = 1e-300, Precision = 1e-16;

    /// <summary>I_x(a, b); x and y = 1 - x are given apart, so that the smaller keeps its digits. O(sqrt(max(a, b))) at worst.</summary>
    public static double Beta(double a, double b, double x, double y)
    {
        if (x <= 0)
            return 0;
        if (y <= 0)
            return 1;
        return x * (a + b + 2) <= a + 1 ? BetaTail(a, b, x, y) : 1 - BetaTail(b, a, y, x);
    }

    /// <summary>Q(a, x), the upper tail.</summary>
    public static double GammaUpper(double a, double x) => x <= 0 ? 1 : double.IsPositiveInfinity(x) ? 0 : x < a + 1 ? 1 - GammaSeries(a, x) : GammaFraction(a, x);

    /// <summary>P(a, x), the lower tail.</summary>
    public static double GammaLower(double a, double x) => x <= 0 ? 0 : double.IsPositiveInfinity(x) ? 1 : x < a + 1 ? GammaSeries(a, x) : 1 - GammaFraction(a, x);

    /// <summary>ln Gamma(x + 1) less Stirling's formula (x + 1/2) ln x - x + ln(2 pi) / 2.</summary>
    public static double StirlingError(double x)
    {
        if (x < 16)
            return SpecialFunctions.GammaLn(x + 1) - (x + 0.5) * Math.Log(x) + x - 0.918938533204672741780329736406;
        double i = 1 / x, i2 = i * i;
        return i * (1.0 / 12 - i2 * (1.0 / 360 - i2 * (1.0 / 1260 - i2 * (1.0 / 1680 - i2 * (1.0 / 1188 - i2 * (691.0 / 360360 - i2 / 156))))));
    }

    /// <summary>ln(1 + x) with small relative error near 0.</summary>
    public static double LogOnePlus(double x)
    {
        double u = 1 + x;
        return u == 1 ? x : Math.Log(u) * x / (u - 1);
    }

    private static double BetaTail(double a, double b, double x, double y)
    {
        double n = a + b;
        double front = Math.Sqrt(a * b / (2 * Math.PI * n))
            * Math.Exp(StirlingError(n) - StirlingError(a) - StirlingError(b) - Deviance(a, n * x) - Deviance(b, n * y));
        if (front == 0)
            return 0;
        // the even part of the fraction: its terms do not cancel for large a, as those of the plain one do (DiDonato and Morris 1992)
        double Term(double m) => m + m * (b - m) * x / (a + 2 * m - 1) + (a + m) * (a * y - b * x + 1 + m * (1 + y)) / (a + 2 * m + 1);
        double fraction = a * (a * y - b * x + 1) / (a + 1);
        if (Math.Abs(fraction) < Tiny)
            fraction = Tiny;
        double c = fraction, d = 0;
        for (int m = 1; m < MostTerms; m++)
        {
            double width = a + 2 * m - 1, above = (a + m - 1) / width * ((n + m - 1) / width) * m * (b - m) * x * x, below = Term(m);
            d = below + above * d;
            d = 1 / (Math.Abs(d) < Tiny ? Tiny : d);
            c = below + above / c;
            if (Math.Abs(c) < Tiny)
                c = Tiny;
            fraction *= c * d;
            if (Math.Abs(c * d - 1) <= Precision)
                break;
        }
        return Math.Min(1, front / fraction);
    }

    // x^a e^-x / Gamma(a)
    private static double GammaFront(double a, double x) => Math.Sqrt(a / (2 * Math.PI)) * Math.Exp(-StirlingError(a) - Deviance(a, x));

    private static double GammaSeries(double a, double x)
    {
        double term = 1 / a, sum = term;
        for (int k = 1; k < MostTerms && term > Precision * sum; k++)
            sum += term *= x / (a + k);
        return Math.Min(1, GammaFront(a, x) * sum);
    }

    private static double GammaFraction(double a, double x)
    {
        double front = GammaFront(a, x);
        if (front == 0)
            return 0;
        double b = x + 1 - a, c = 1 / Tiny, d = 1 / b, fraction = d;
        for (int k = 1; k < MostTerms; k++)
        {
            double coefficient = -k * (k - a);
            b += 2;
            d = coefficient * d + b;
            d = 1 / (Math.Abs(d) < Tiny ? Tiny : d);
            c = b + coefficient / c;
            if (Math.Abs(c) < Tiny)
                c = Tiny;
            double change = c * d;
            fraction *= change;
            if (Math.Abs(change - 1) <= Precision)
                break;
        }
        return Math.Min(1, front * fraction);
    }

    // x ln(x / mean) + mean - x, without cancellation where both are close
    private static double Deviance(double x, double mean)
    {
        double difference = x - mean;
        if (Math.Abs(difference) >= 0.1 * (x + mean))
            return x * Math.Log(x / mean) - difference;
        double v = difference / (x + mean), sum = difference * v, term = 2 * x * v, square = v * v;
        for (int j = 1; j < 1000; j++)
        {
            term *= square;
            double next = sum + term / (2 * j + 1);
            if (next == sum)
                break;
            sum = next;
        }
        return sum;
    }
}
