using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Regression;

/// <summary>
/// CR2 errors with Satterthwaite degrees of freedom from the thin Q alone, without n x n matrices (Bell and McCaffrey 2002;
/// Pustejovsky and Tipton 2018). A vehicle that alone determines a direction is passed over in that direction.
/// </summary>
internal sealed class ClusterRobust
{
    private const double Full = 1 - 1e-10;
    private readonly List<(double[] Score, Matrix<double> Half, Matrix<double> Ratio, bool Full)> _vehicles = [];
    private readonly int _size;

    /// <param name="q">Thin Q without the constant column, as columns.</param>
    public ClusterRobust(double[][] q, double[] residuals, int[] vehicles)
    {
        int n = residuals.Length;
        if (vehicles.Length != n)
            throw new ArgumentException($"vehicles must have length {n} but has {vehicles.Length}", nameof(vehicles));
        _size = q.Length + 1;
        double constant = 1 / Math.Sqrt(n);
        foreach (var rows in Enumerable.Range(0, n).GroupBy(i => vehicles[i]))
        {
            var part = Matrix<double>.Build.Dense(rows.Count(), _size);
            var e = Vector<double>.Build.Dense(part.RowCount);
            int at = 0;
            foreach (int i in rows)
            {
                part[at, 0] = constant;
                for (int j = 0; j < q.Length; j++)
                    part[at, j + 1] = q[j][i];
                e[at++] = residuals[i];
            }
            // S = Q_j'Q_j = U diag(s) U'
            var evd = part.TransposeThisAndMultiply(part).Evd(Symmetricity.Symmetric);
            var u = evd.EigenVectors;
            bool full = false;
            var half = Matrix<double>.Build.Dense(_size, _size);
            var ratio = Matrix<double>.Build.Dense(_size, _size);
            for (int k = 0; k < _size; k++)
            {
                double s = Math.Max(0, evd.EigenValues[k].Real);
                if (s > Full)
                {
                    full = true;
                    continue;
                }
                if (s < 1e-14)
                    continue;
                var column = u.Column(k);
                half += column.OuterProduct(column) * (1 / Math.Sqrt(1 - s));
                ratio += column.OuterProduct(column) * (s / (1 - s));
            }
            // directions without any leverage keep the plain score, which is zero there
            _vehicles.Add(((half * part.TransposeThisAndMultiply(e)).ToArray(), HalfTimesS(evd, u), ratio, full));
        }
    }

    private Matrix<double> HalfTimesS(MathNet.Numerics.LinearAlgebra.Factorization.Evd<double> evd, Matrix<double> u)
    {
        var m = Matrix<double>.Build.Dense(_size, _size);
        for (int k = 0; k < _size; k++)
        {
            double s = Math.Max(0, evd.EigenValues[k].Real);
            if (s > Full || s < 1e-14)
                continue;
            m += u.Column(k).OuterProduct(u.Column(k)) * (s / Math.Sqrt(1 - s));
        }
        return m;
    }

    /// <summary>Standard error and degrees of freedom of the contrast a . Q'y; NaN when it rests on one vehicle.</summary>
    public (double StandardError, double Df) Of(double[] contrast)
    {
        if (_vehicles.Count < 2)
            return (double.NaN, double.NaN);
        var a = Vector<double>.Build.Dense(contrast);
        double variance = 0, trace = 0, squares = 0, cross = 0;
        var outer = Matrix<double>.Build.Dense(_size, _size);
        foreach (var (score, half, ratio, _) in _vehicles)
        {
            double u = 0;
            for (int k = 0; k < _size; k++)
                u += contrast[k] * score[k];
            variance += u * u;
            double d = a * (ratio * a);
            var h = half * a;
            double length = h * h;
            trace += d - length;
            squares += d * d;
            cross += d * length;
            outer += h.OuterProduct(h);
        }
        double below = squares - 2 * cross + outer.PointwisePower(2).RowSums().Sum(), df = trace * trace / below;
        return trace <= 1e-12 * a.DotProduct(a) || !(below > 0) ? (double.NaN, double.NaN) : (Math.Sqrt(variance), df);
    }
}
