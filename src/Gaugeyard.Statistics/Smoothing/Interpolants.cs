namespace Gaugeyard.Statistics.Smoothing;

/// <summary>Curves through every point.</summary>
public enum InterpolantKind
{
    /// <summary>Natural cubic spline: second derivative zero at the ends.</summary>
    NaturalCubic,

    /// <summary>Shape-preserving cubic (Fritsch and Carlson 1980, SIAM J. Numerical Analysis 17:238-246).</summary>
    MonotoneCubic,

    /// <summary>Akima (1970, J. ACM 17:589-602).</summary>
    Akima,
}

/// <summary>A piecewise cubic through points with distinct, rising x. Beyond the ends it goes on in a straight line.</summary>
public sealed class Interpolants
{
    private readonly double[] _x, _y, _slope;

    private Interpolants(double[] x, double[] y, double[] slope) => (_x, _y, _slope) = (x, y, slope);

    /// <summary>Builds the curve; records with equal x are averaged first.</summary>
    /// <returns>The curve, or the reason why there is none.</returns>
    public static (Interpolants? Curve, string? Reason) Of(double[] x, double[] y, InterpolantKind kind)
    {
        if (x.Length != y.Length)
            throw new ArgumentException($"y must have length {x.Length} but has {y.Length}", nameof(y));
        var points = x.Zip(y).GroupBy(p => p.First).OrderBy(g => g.Key).Select(g => (X: g.Key, Y: g.Average(p => p.Second))).ToArray();
        if (points.Length < 2)
            return (null, $"an interpolant needs at least 2 distinct values but there {(points.Length == 1 ? "is 1" : "are none")}");
        double[] xs = [.. points.Select(p => p.X)], ys = [.. points.Select(p => p.Y)];
        double[] slope = kind switch
        {
            InterpolantKind.NaturalCubic => Natural(xs, ys),
            InterpolantKind.MonotoneCubic => Monotone(xs, ys),
            _ => Akima(xs, ys),
        };
        return (new Interpolants(xs, ys, slope), null);
    }

    /// <summary>Value at x.</summary>
    public double Evaluate(double x)
    {
        if (x <= _x[0])
            return _y[0] + (x - _x[0]) * _slope[0];
        if (x >= _x[^1])
            return _y[^1] + (x - _x[^1]) * _slope[^1];
        int i = Array.BinarySearch(_x, x);
        i = Math.Clamp(i < 0 ? ~i - 1 : i, 0, _x.Length - 2);
        return Cubic(x, _x[i], _x[i + 1], _y[i], _y[i + 1], _slope[i], _slope[i + 1]);
    }

    /// <summary>Cubic on [x0, x1] by values and slopes at its ends.</summary>
    internal static double Cubic(double x, double x0, double x1, double y0, double y1, double s0, double s1)
    {
        double h = x1 - x0, t = (x - x0) / h, u = 1 - t;
        return u * u * (1 + 2 * t) * y0 + t * t * (3 - 2 * t) * y1 + h * t * u * (u * s0 - t * s1);
    }

    private static double[] Secants(double[] x, double[] y) => [.. Enumerable.Range(0, x.Length - 1).Select(i => (y[i + 1] - y[i]) / (x[i + 1] - x[i]))];

    // tridiagonal system for the slopes with zero curvature at both ends
    private static double[] Natural(double[] x, double[] y)
    {
        int n = x.Length;
        double[] s = Secants(x, y);
        if (n == 2)
            return [s[0], s[0]];
        double[] lower = new double[n], diagonal = new double[n], upper = new double[n], right = new double[n];
        (diagonal[0], upper[0], right[0]) = (2, 1, 3 * s[0]);
        for (int i = 1; i < n - 1; i++)
        {
            double h0 = x[i] - x[i - 1], h1 = x[i + 1] - x[i];
            (lower[i], diagonal[i], upper[i], right[i]) = (h1, 2 * (h0 + h1), h0, 3 * (h1 * s[i - 1] + h0 * s[i]));
        }
        (lower[n - 1], diagonal[n - 1], right[n - 1]) = (1, 2, 3 * s[n - 2]);
        for (int i = 1; i < n; i++)
        {
            double factor = lower[i] / diagonal[i - 1];
            diagonal[i] -= factor * upper[i - 1];
            right[i] -= factor * right[i - 1];
        }
        var slope = new double[n];
        slope[n - 1] = right[n - 1] / diagonal[n - 1];
        for (int i = n - 2; i >= 0; i--)
            slope[i] = (right[i] - upper[i] * slope[i + 1]) / diagonal[i];
        return slope;
    }

    private static double[] Monotone(double[] x, double[] y)
    {
        int n = x.Length;
        double[] s = Secants(x, y), m = new double[n];
        m[0] = s[0];
        m[n - 1] = s[n - 2];
        for (int i = 1; i < n - 1; i++)
            m[i] = (s[i - 1] + s[i]) / 2;
        for (int i = 0; i < n - 1; i++)
        {
            if (s[i] == 0)
            {
                m[i] = m[i + 1] = 0;
                continue;
            }
            double alpha = m[i] / s[i], beta = m[i + 1] / s[i];
            // slopes against the secant would leave the shape
            if (alpha < 0)
                (m[i], alpha) = (0, 0);
            if (beta < 0)
                (m[i + 1], beta) = (0, 0);
            double p = 2 * alpha + beta - 3, q = alpha + 2 * beta - 3;
            if (p > 0 && q > 0 && alpha * (p + q) < p * p)
            {
                double tau = 3 * s[i] / Math.Sqrt(alpha * alpha + beta * beta);
                m[i] = tau * alpha;
                m[i + 1] = tau * beta;
            }
        }
        return m;
    }

    private static double[] Akima(double[] x, double[] y)
    {
        int n = x.Length;
        double[] s = Secants(x, y);
        if (n == 2)
            return [s[0], s[0]];
        // two secants are carried on beyond either end
        double[] m = new double[n + 3];
        s.CopyTo(m, 2);
        m[1] = 2 * m[2] - m[3];
        m[0] = 2 * m[1] - m[2];
        m[n + 1] = 2 * m[n] - m[n - 1];
        m[n + 2] = 2 * m[n + 1] - m[n];
        double largest = 0;
        for (int i = 0; i < n; i++)
            largest = Math.Max(largest, Math.Abs(m[i + 3] - m[i + 2]) + Math.Abs(m[i + 1] - m[i]));
        var slope = new double[n];
        for (int i = 0; i < n; i++)
        {
            double right = Math.Abs(m[i + 3] - m[i + 2]), left = Math.Abs(m[i + 1] - m[i]);
            slope[i] = right + left > 1e-9 * largest ? (right * m[i + 1] + left * m[i + 2]) / (right + left) : (m[i] + m[i + 3]) / 2;
        }
        return slope;
    }
}
