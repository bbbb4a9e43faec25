using System.Numerics;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// One predictor, sorted: the q nearest records are a contiguous window, found by bisection, and the local polynomial needs only
/// power sums over that window. O(q) per point. Immutable; safe from any thread.
/// </summary>
internal sealed class SortedLine
{
    private readonly double[] _x, _y;
    private readonly double[]? _w;
    private readonly long[]? _cumulated;
    private readonly double _centre;
    private readonly int _degree;

    /// <param name="x">Rising values.</param>
    /// <param name="y">Readings in the same order.</param>
    /// <param name="w">Weights beside the tricube ones, or null.</param>
    /// <param name="cumulated">Number of records up to and including each entry where entries stand for several, or null.</param>
    public SortedLine(double[] x, double[] y, double[]? w, int degree, long[]? cumulated = null)
    {
        (_x, _w, _degree, _cumulated) = (x, w, degree, cumulated);
        // readings far from zero lose no digits
        _centre = y.Length == 0 ? 0 : y.Average();
        _y = [.. y.Select(v => v - _centre)];
    }

    public int Length => _x.Length;

    public ReadOnlySpan<double> X => _x;

    /// <summary>Distance to the q-th nearest record.</summary>
    /// <param name="exclude">Position that does not count, or -1.</param>
    public double Bandwidth(double at, long q, int exclude = -1)
    {
        int n = _x.Length;
        long total = UpTo(n - 1) - (exclude >= 0 ? Weight(exclude) : 0);
        q = Math.Min(q, total);
        if (q <= 0)
            return 0;
        // first left end whose distance is no longer the larger one; the bandwidth is attained there or one before
        int low = 0, high = n - 1;
        while (low < high)
        {
            int middle = (low + high) >>> 1, right = RightEnd(middle, q, exclude);
            if (right >= n || at - _x[middle] <= _x[right] - at)
                high = middle;
            else
                low = middle + 1;
        }
        double h = double.PositiveInfinity;
        for (int left = Math.Max(0, low - 1); left <= low; left++)
        {
            int right = RightEnd(left, q, exclude);
            if (right < n)
                h = Math.Min(h, Math.Max(at - _x[left], _x[right] - at));
        }
        return h;
    }

    private long Weight(int k) => _cumulated is null ? 1 : _cumulated[k] - (k > 0 ? _cumulated[k - 1] : 0);

    private long UpTo(int k) => k < 0 ? 0 : _cumulated is null ? k + 1 : _cumulated[k];

    // smallest right end such that [left, right] holds q records
    private int RightEnd(int left, long q, int exclude)
    {
        if (_cumulated is null)
        {
            int right = left + (int)q - 1;
            return exclude >= left && exclude <= right ? right + 1 : right;
        }
        long wanted = UpTo(left - 1) + q;
        int low = left, high = _x.Length;
        while (low < high)
        {
            int middle = (low + high) >>> 1;
            if (_cumulated[middle] - (exclude >= left && exclude <= middle ? Weight(exclude) : 0) >= wanted)
                high = middle;
            else
                low = middle + 1;
        }
        return low;
    }

    /// <summary>Fit at a point with bandwidth h.</summary>
    public LineFit Fit(double at, double h, int exclude = -1)
    {
        if (!(h > 0) || double.IsInfinity(h))
            return LineFit.None;
        int first = Below(at - h), last = Above(at + h);
        var s = new PowerSums();
        if (exclude >= first && exclude < last)
        {
            Add(ref s, first, exclude, at, h);
            Add(ref s, exclude + 1, last, at, h);
        }
        else
        {
            Add(ref s, first, last, at, h);
        }
        if (!(s.S0 > 0))
            return LineFit.None;
        double ybar = s.T0 / s.S0, m = s.S1 / s.S0;
        if (_degree == 0)
            return new LineFit(_centre + ybar, 1 / s.S0, 0, 0, h, first, last, null);
        // about the weighted means, which keeps the digits at the ends of the range
        double a11 = s.S2 - s.S1 * m, b1 = s.T1 - s.S1 * ybar;
        if (!(a11 > 1e-9 * s.S2))
            return Exact(at, h, first, last, exclude);
        if (_degree == 1)
            return new LineFit(_centre + ybar - b1 / a11 * m, 1 / s.S0 + m * m / a11, -m / a11, 0, h, first, last, null);
        double m2 = s.S2 / s.S0, a12 = s.S3 - s.S1 * m2, a22 = s.S4 - s.S2 * m2, b2 = s.T2 - s.S2 * ybar, ratio = a12 / a11, rest = a22 - a12 * ratio;
        if (!(rest > 1e-7 * s.S4))
            return Exact(at, h, first, last, exclude);
        double g = (m2 - m * ratio) / rest, c1 = -m / a11 + g * ratio;
        return new LineFit(_centre + ybar + c1 * b1 - g * b2, 1 / s.S0 - c1 * m + g * m2, c1, -g, h, first, last, null);
    }

    /// <summary>Weights of the readings of a fit, for positions First .. Last - 1.</summary>
    public void Row(double at, LineFit fit, Span<double> row)
    {
        if (fit.Weights is { } known)
        {
            known.CopyTo(row);
            return;
        }
        for (int k = fit.First; k < fit.Last; k++)
        {
            double z = (_x[k] - at) / fit.H, d = Math.Abs(z), cube = Math.Max(0, 1 - d * d * d);
            row[k - fit.First] = cube * cube * cube * (_w?[k] ?? 1) * (fit.A0 + z * (fit.A1 + z * fit.A2));
        }
    }

    // near-singular windows: orthogonal decomposition instead of power sums
    private LineFit Exact(double at, double h, int first, int last, int exclude)
    {
        var offsets = new List<double>();
        var weights = new List<double>();
        var places = new List<int>();
        for (int k = first; k < last; k++)
        {
            double d = Math.Abs(_x[k] - at) / h, cube = Math.Max(0, 1 - d * d * d), w = cube * cube * cube * (_w?[k] ?? 1);
            if (k == exclude || !(w > 0))
                continue;
            offsets.Add(_x[k] - at);
            weights.Add(w);
            places.Add(k);
        }
        if (LocalSolve.Row([[.. offsets]], [.. weights], _degree) is not { } part)
            return LineFit.None;
        var row = new double[last - first];
        double value = 0, sum = 0;
        for (int k = 0; k < part.Length; k++)
        {
            row[places[k] - first] = part[k];
            value += part[k] * _y[places[k]];
            sum += part[k];
        }
        // weights that do not add up to one (a polynomial that cannot be told apart from a constant) act on the readings themselves
        return new LineFit(sum * _centre + value, 0, 0, 0, h, first, last, row);
    }

    private void Add(ref PowerSums s, int first, int last, double at, double h)
    {
        int width = Vector<double>.Count, k = first;
        if (last - first >= 2 * width)
        {
            Vector<double> v0 = default, v1 = default, v2 = default, v3 = default, v4 = default, u0 = default, u1 = default, u2 = default;
            Vector<double> centre = new(at), scale = new(1 / h), one = Vector<double>.One;
            for (; k <= last - width; k += width)
            {
                var z = (new Vector<double>(_x, k) - centre) * scale;
                var d = Vector.Abs(z);
                var cube = Vector.Max(Vector<double>.Zero, one - d * d * d);
                var w = cube * cube * cube;
                if (_w is not null)
                    w *= new Vector<double>(_w, k);
                var y = new Vector<double>(_y, k);
                var wz = w * z;
                v0 += w;
                u0 += w * y;
                v1 += wz;
                u1 += wz * y;
                var wz2 = wz * z;
                v2 += wz2;
                if (_degree < 2)
                    continue;
                u2 += wz2 * y;
                v3 += wz2 * z;
                v4 += wz2 * z * z;
            }
            s.S0 += Vector.Sum(v0);
            s.S1 += Vector.Sum(v1);
            s.S2 += Vector.Sum(v2);
            s.S3 += Vector.Sum(v3);
            s.S4 += Vector.Sum(v4);
            s.T0 += Vector.Sum(u0);
            s.T1 += Vector.Sum(u1);
            s.T2 += Vector.Sum(u2);
        }
        for (; k < last; k++)
        {
            double z = (_x[k] - at) / h, d = Math.Abs(z), cube = Math.Max(0, 1 - d * d * d), w = cube * cube * cube * (_w?[k] ?? 1), wz = w * z, wz2 = wz * z;
            s.S0 += w;
            s.S1 += wz;
            s.S2 += wz2;
            s.S3 += wz2 * z;
            s.S4 += wz2 * z * z;
            s.T0 += w * _y[k];
            s.T1 += wz * _y[k];
            s.T2 += wz2 * _y[k];
        }
    }

    private int Below(double value)
    {
        int low = 0, high = _x.Length;
        while (low < high)
        {
            int middle = (low + high) >>> 1;
            if (_x[middle] > value)
                high = middle;
            else
                low = middle + 1;
        }
        return low;
    }

    private int Above(double value)
    {
        int low = 0, high = _x.Length;
        while (low < high)
        {
            int middle = (low + high) >>> 1;
            if (_x[middle] >= value)
                high = middle;
            else
                low = middle + 1;
        }
        return low;
    }

    private struct PowerSums
    {
        public double S0, S1, S2, S3, S4, T0, T1, T2;
    }
}

/// <summary>
/// A local polynomial at its centre: the value, and the weight of a reading at scaled distance z, w(z) (A0 + A1 z + A2 z^2), or
/// the weights themselves where the window was nearly singular.
/// </summary>
internal readonly record struct LineFit(double Value, double A0, double A1, double A2, double H, int First, int Last, double[]? Weights)
{
    /// <summary>No fit: the window holds nothing.</summary>
    public static LineFit None { get; } = new(double.NaN, 0, 0, 0, 0, 0, 0, null);

    public bool Exists => !double.IsNaN(Value);
}
