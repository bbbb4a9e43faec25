using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>How the stiffness of a smoothing spline is chosen.</summary>
public enum SplineCriterion
{
    /// <summary>Generalised cross-validation (Craven and Wahba 1979).</summary>
    Gcv,

    /// <summary>Restricted maximum likelihood (Wahba 1985).</summary>
    Reml,

    /// <summary>Leave-one-out by the hat diagonal, exact for fixed stiffness.</summary>
    LeaveOneOut,

    /// <summary>Corrected Akaike criterion (Hurvich, Simonoff and Tsai 1998).</summary>
    Aicc,
}

/// <summary>
/// Cubic smoothing spline with a knot at every distinct x: minimises sum w (y - g)^2 + lambda x integral of g''^2. Computed in
/// O(n) as the posterior mean of an integrated random walk by two information filters (Wahba 1978, JRSS B 40:364-372; Wecker and
/// Ansley 1983, JASA 78:81-89; Kohn and Ansley 1989, Biometrika 76:65-79), which keeps its digits at any n.
/// </summary>
public sealed class SmoothingSpline
{
    private readonly double[] _x, _w, _ybar, _y;
    private readonly double[]? _weights;
    private readonly int[] _place;
    private readonly double _origin, _range, _within;

    private SmoothingSpline(double[] x, double[] w, double[] ybar, double origin, double range, double within, double[] y, double[]? weights, int[] place)
    {
        (_x, _w, _ybar, _origin, _range, _within) = (x, w, ybar, origin, range, within);
        (_y, _weights, _place) = (y, weights, place);
    }

    /// <summary>Number of records.</summary>
    public int Count => _y.Length;

    /// <summary>Number of distinct x.</summary>
    public int Distinct => _x.Length;

    /// <summary>Sets up the problem; ties in x are merged.</summary>
    /// <param name="x">n finite values.</param>
    /// <param name="y">n finite values.</param>
    /// <param name="weights">n positive weights, or null.</param>
    /// <returns>The problem, or the reason why there is none.</returns>
    /// <exception cref="ArgumentException">Lengths differ, or a value is not finite.</exception>
    public static (SmoothingSpline? Problem, string? Reason) Of(double[] x, double[] y, double[]? weights = null)
    {
        if (x.Length != y.Length)
            throw new ArgumentException($"y must have length {x.Length} but has {y.Length}", nameof(y));
        if (weights is not null && weights.Length != x.Length)
            throw new ArgumentException($"weights must have length {x.Length} but has {weights.Length}", nameof(weights));
        if (x.Concat(y).Any(v => !double.IsFinite(v)) || weights?.Any(w => !(w > 0)) == true)
            throw new ArgumentException("x and y must be finite and weights positive", nameof(x));
        double[] keys = (double[])x.Clone();
        int[] order = [.. Enumerable.Range(0, x.Length)];
        Array.Sort(keys, order);
        var xs = new List<double>();
        var ws = new List<double>();
        var ys = new List<double>();
        var place = new int[x.Length];
        double within = 0;
        for (int i = 0, j; i < keys.Length; i = j)
        {
            double w = 0, sum = 0;
            for (j = i; j < keys.Length && keys[j] == keys[i]; j++)
            {
                double wi = weights?[order[j]] ?? 1;
                w += wi;
                sum += wi * y[order[j]];
            }
            double mean = sum / w;
            for (int k = i; k < j; k++)
            {
                within += (weights?[order[k]] ?? 1) * Math.Pow(y[order[k]] - mean, 2);
                place[order[k]] = xs.Count;
            }
            xs.Add(keys[i]);
            ws.Add(w);
            ys.Add(mean);
        }
        if (xs.Count < 3)
            return (null, $"a smoothing spline needs at least 3 distinct values but there {(xs.Count == 1 ? "is 1" : $"are {xs.Count}")}");
        double origin = xs[0], range = xs[^1] - xs[0];
        return (new SmoothingSpline([.. xs.Select(v => (v - origin) / range)], [.. ws], [.. ys], origin, range, within, y, weights, place), null);
    }

    /// <summary>Fit with a given stiffness; lambda belongs to x scaled to [0, 1].</summary>
    public SplineFit Fit(double lambda)
    {
        int m = _x.Length;
        // centring keeps the digits of values far from zero
        double centre = 0, total = 0;
        for (int i = 0; i < m; i++)
        {
            centre += _w[i] * _ybar[i];
            total += _w[i];
        }
        centre /= total;
        var fa = new double[m];
        var fb = new double[m];
        var fc = new double[m];
        var fu = new double[m];
        var fv = new double[m];
        double a = 0, b = 0, c = 0, u = 0, v = 0, logDet = 0;
        for (int i = 0; i < m; i++)
        {
            if (i > 0)
            {
                double h = _x[i] - _x[i - 1], old = b;
                b -= h * a;
                c = c - h * old - h * b;
                v -= h * u;
                Spread(h, lambda, ref a, ref b, ref c, ref u, ref v, ref logDet);
            }
            a += _w[i];
            u += _w[i] * (_ybar[i] - centre);
            (fa[i], fb[i], fc[i], fu[i], fv[i]) = (a, b, c, u, v);
        }
        double lastDet = a * c - b * b;
        var value = new double[m];
        var slope = new double[m];
        var leverage = new double[m];
        var variance = new double[m];
        a = b = c = u = v = 0;
        double ignored = 0;
        for (int i = m - 1; i >= 0; i--)
        {
            if (i < m - 1)
            {
                double h = _x[i + 1] - _x[i];
                a += _w[i + 1];
                u += _w[i + 1] * (_ybar[i + 1] - centre);
                Spread(h, lambda, ref a, ref b, ref c, ref u, ref v, ref ignored);
                double old = b;
                b += h * a;
                c = c + h * old + h * b;
                v += h * u;
            }
            double ta = fa[i] + a, tb = fb[i] + b, tc = fc[i] + c, tu = fu[i] + u, tv = fv[i] + v, det = ta * tc - tb * tb;
            value[i] = (tc * tu - tb * tv) / det + centre;
            slope[i] = (ta * tv - tb * tu) / det;
            variance[i] = tc / det;
            leverage[i] = _w[i] * tc / det;
        }
        double rss = _within, d = _within;
        for (int i = 0; i < m; i++)
        {
            double rest = _ybar[i] - value[i];
            rss += _w[i] * rest * rest;
            d += _w[i] * (_ybar[i] - centre) * rest;
        }
        double df = Sums.Of(leverage), reml = (Count - 2) * Math.Log(Math.Max(d, 1e-300) / (Count - 2)) + logDet + Math.Log(lastDet);
        return new SplineFit(this, lambda, df, rss, reml, value, slope, variance, leverage);
    }

    // (I + L V)^-1 applied to (L, xi), V the covariance of an integrated random walk over a gap
    private static void Spread(double h, double lambda, ref double a, ref double b, ref double c, ref double u, ref double v, ref double logDet)
    {
        double v11 = h * h * h / (3 * lambda), v12 = h * h / (2 * lambda), v22 = h / lambda;
        double m11 = 1 + a * v11 + b * v12, m12 = a * v12 + b * v22, m21 = b * v11 + c * v12, m22 = 1 + b * v12 + c * v22, det = m11 * m22 - m12 * m21;
        logDet += Math.Log(det);
        (a, b, c) = ((m22 * a - m12 * b) / det, (m22 * b - m12 * c) / det, (m11 * c - m21 * b) / det);
        (u, v) = ((m22 * u - m12 * v) / det, (m11 * v - m21 * u) / det);
    }

    /// <summary>Fit with stated degrees of freedom (trace), between 2 and the number of distinct x.</summary>
    public SplineFit FitDf(double df)
    {
        if (!(df > 2 && df < Distinct))
            throw new ArgumentOutOfRangeException(nameof(df), $"degrees of freedom must lie above 2 and below {Distinct}, the number of distinct values, but are {df}");
        // degrees of freedom fall as the stiffness rises; the bracket grows from a middling stiffness so that no extreme one is tried
        double f(double logLambda) => Fit(Math.Exp(logLambda)).Df - df;
        double low = Math.Log(1e-4), high = low;
        while (f(low) < 0 && low > -80)
            low -= 2;
        while (f(high) > 0 && high < 80)
            high += 2;
        return Fit(Math.Exp(MathNet.Numerics.RootFinding.Brent.FindRoot(f, low, high, 1e-13, 300)));
    }

    /// <summary>Fit with a stiffness in units of x and y (y^2 against lambda times y''^2 per unit of x).</summary>
    public SplineFit FitInUnits(double lambda) => Fit(lambda / Math.Pow(_range, 3));

    /// <summary>
    /// Fit whose stiffness minimises a criterion: the best of a grid of 30 over ln lambda, then golden section about it. Of several
    /// local minima the lowest one on the grid is taken.
    /// </summary>
    public SplineFit Choose(SplineCriterion criterion = SplineCriterion.Gcv, CancellationToken cancel = default)
    {
        double low = Math.Log(0.01 / (Math.Pow(Math.PI, 4) * Math.Pow(Count, 3))), high = Math.Log(10.0 * Count);
        const int Grid = 30;
        double Score(double l)
        {
            cancel.ThrowIfCancellationRequested();
            var fit = Fit(Math.Exp(l));
            double score = criterion switch { SplineCriterion.Reml => fit.Reml, SplineCriterion.LeaveOneOut => fit.LeaveOneOut(), SplineCriterion.Aicc => fit.Aicc, _ => fit.Gcv };
            return double.IsNaN(score) ? double.PositiveInfinity : score;
        }
        double[] grid = [.. Enumerable.Range(0, Grid).Select(i => low + (high - low) * i / (Grid - 1))], scores = [.. grid.Select(Score)];
        int best = Array.IndexOf(scores, scores.Min());
        double a = grid[Math.Max(0, best - 1)], b = grid[Math.Min(Grid - 1, best + 1)];
        const double Golden = 0.3819660112501051;
        double x = a + Golden * (b - a), y = b - Golden * (b - a), fx = Score(x), fy = Score(y);
        for (int i = 0; i < 60 && b - a > 1e-8; i++)
        {
            if (fx <= fy)
            {
                (b, y, fy) = (y, x, fx);
                x = a + Golden * (b - a);
                fx = Score(x);
            }
            else
            {
                (a, x, fx) = (x, y, fy);
                y = b - Golden * (b - a);
                fy = Score(y);
            }
        }
        return Fit(Math.Exp(0.5 * (a + b)));
    }

    /// <summary>Fit of one smoothing spline.</summary>
    public sealed class SplineFit
    {
        private readonly SmoothingSpline _problem;
        private readonly double[] _value, _slope, _variance, _leverage;

        internal SplineFit(SmoothingSpline problem, double lambda, double df, double rss, double reml, double[] value, double[] slope, double[] variance, double[] leverage)
        {
            (_problem, Lambda, Df, Rss, Reml) = (problem, lambda, df, rss, reml);
            (_value, _slope, _variance, _leverage) = (value, slope, variance, leverage);
        }

        /// <summary>Stiffness for x scaled to [0, 1].</summary>
        public double Lambda { get; }

        /// <summary>Stiffness in units of x.</summary>
        public double LambdaInUnits => Lambda * Math.Pow(_problem._range, 3);

        /// <summary>Trace of the smoother.</summary>
        public double Df { get; }

        /// <summary>Residual sum of squares over all records.</summary>
        public double Rss { get; }

        /// <summary>Restricted likelihood criterion, smaller is better.</summary>
        public double Reml { get; }

        /// <summary>Generalised cross-validation (Craven and Wahba 1979).</summary>
        public double Gcv => Rss / _problem.Count / Math.Pow(1 - Df / _problem.Count, 2);

        /// <summary>Corrected Akaike criterion (Hurvich, Simonoff and Tsai 1998).</summary>
        public double Aicc => _problem.Count - Df - 2 > 0 ? Math.Log(Rss / _problem.Count) + 1 + 2 * (Df + 1) / (_problem.Count - Df - 2) : double.NaN;

        /// <summary>Residual scale.</summary>
        public double S => Math.Sqrt(Rss / (_problem.Count - Df));

        /// <summary>Value at x; linear beyond the tested range.</summary>
        public double Evaluate(double x) => Hermite((x - _problem._origin) / _problem._range, _value, _slope);

        /// <summary>Standard error of the curve at x in the Bayesian sense (Wahba 1983); exact at the data, interpolated between.</summary>
        public double StandardError(double x)
        {
            double z = (x - _problem._origin) / _problem._range;
            int i = Interval(z);
            double t = Math.Clamp((z - _problem._x[i]) / (_problem._x[i + 1] - _problem._x[i]), 0, 1);
            return S * Math.Sqrt(Math.Max(0, _variance[i] + t * (_variance[i + 1] - _variance[i])));
        }

        /// <summary>Slope of the curve at x, per unit of x.</summary>
        public double Slope(double x)
        {
            double z = (x - _problem._origin) / _problem._range;
            if (z <= 0)
                return _slope[0] / _problem._range;
            if (z >= 1)
                return _slope[^1] / _problem._range;
            int i = Interval(z);
            double h = _problem._x[i + 1] - _problem._x[i], t = (z - _problem._x[i]) / h, d = (_value[i + 1] - _value[i]) / h;
            return (6 * t * (1 - t) * d + (1 - t) * (1 - 3 * t) * _slope[i] + t * (3 * t - 2) * _slope[i + 1]) / _problem._range;
        }

        /// <summary>Leave-one-out residual mean square for fixed stiffness, exact by the hat diagonal; each tied record has its share of the leverage by weight.</summary>
        public double LeaveOneOut()
        {
            double sum = 0;
            for (int i = 0; i < _problem.Count; i++)
            {
                int k = _problem._place[i];
                double share = _leverage[k] * (_problem._weights?[i] ?? 1) / _problem._w[k], rest = (_problem._y[i] - _value[k]) / (1 - share);
                sum += rest * rest;
            }
            return sum / _problem.Count;
        }

        /// <summary>Fitted value of each record, in the order they came in.</summary>
        public double[] FittedValues() => [.. _problem._place.Select(k => _value[k])];

        /// <summary>Own weight of each record in its fitted value.</summary>
        public double[] Hat() => [.. _problem._place.Select((k, i) => _leverage[k] * (_problem._weights?[i] ?? 1) / _problem._w[k])];

        private double Hermite(double z, double[] value, double[] slope)
        {
            double[] x = _problem._x;
            if (z <= x[0])
                return value[0] + (z - x[0]) * slope[0];
            if (z >= x[^1])
                return value[^1] + (z - x[^1]) * slope[^1];
            int i = Interval(z);
            return Interpolants.Cubic(z, x[i], x[i + 1], value[i], value[i + 1], slope[i], slope[i + 1]);
        }

        private int Interval(double z)
        {
            int i = Array.BinarySearch(_problem._x, z);
            return Math.Clamp(i < 0 ? ~i - 1 : i, 0, _problem._x.Length - 2);
        }
    }
}
