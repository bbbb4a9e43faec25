using MathNet.Numerics.LinearAlgebra;
using MathNet.Numerics.LinearAlgebra.Factorization;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>How far residuals are downweighted.</summary>
public enum RobustLoss
{
    /// <summary>Huber's: full weight up to 1.345 scales, then falling.</summary>
    Huber,

    /// <summary>Tukey's bisquare: no weight beyond 4.685 scales.</summary>
    Bisquare,
}

/// <summary>A robust linear fit.</summary>
/// <param name="Coefficients">One per column of the design.</param>
/// <param name="Scale">Median absolute residual over 0.6745.</param>
/// <param name="Weights">One per record, 0 to 1.</param>
/// <param name="Converged">Whether coefficients settled; read first.</param>
public sealed record RobustFit(bool Converged, double[] Coefficients, double Scale, double[] Weights, double[] Residuals);

/// <summary>
/// M-estimation of a linear model by iteratively reweighted least squares (Huber 1973, Ann. Stat. 1:799-821; Beaton and Tukey 1974), from least squares, the
/// scale re-estimated at each step. Stands wild readings, not wild designs.
/// </summary>
public static class RobustRegression
{
    private const double HuberBound = 1.345, BisquareBound = 4.685;

    /// <summary>Fits. O(n p^2) per step; Householder QR at every step.</summary>
    /// <param name="design">p columns of n values; give a column of ones for an intercept.</param>
    /// <param name="reading">n values.</param>
    /// <param name="accuracy">Stops when the residuals move by less than this, relative to their size.</param>
    /// <exception cref="ArgumentException">Lengths differ, there are fewer records than columns, or columns are collinear.</exception>
    public static RobustFit Fit(IReadOnlyList<double[]> design, double[] reading, RobustLoss loss = RobustLoss.Bisquare, double accuracy = 1e-12, int most = 500, CancellationToken cancel = default)
    {
        int n = reading.Length, p = design.Count;
        foreach (double[] column in design)
            if (column.Length != n)
                throw new ArgumentException($"every column must have length {n} but one has {column.Length}", nameof(design));
        if (n <= p)
            throw new ArgumentException($"there must be more records than columns, but there are {n} records and {p} columns", nameof(reading));
        var weights = new double[n];
        Array.Fill(weights, 1);
        double[] coefficients = Solve(design, reading, weights), residuals = Residuals(design, reading, coefficients);
        double scale = 0;
        for (int step = 0; step < most; step++)
        {
            cancel.ThrowIfCancellationRequested();
            scale = RobustScale.Median(Array.ConvertAll(residuals, Math.Abs)) / 0.6745;
            if (scale == 0)
                return new RobustFit(true, coefficients, 0, weights, residuals);
            for (int i = 0; i < n; i++)
                weights[i] = Weight(residuals[i] / scale, loss);
            coefficients = Solve(design, reading, weights);
            double[] next = Residuals(design, reading, coefficients);
            double moved = 0, size = 0;
            for (int i = 0; i < n; i++)
            {
                moved += (next[i] - residuals[i]) * (next[i] - residuals[i]);
                size += residuals[i] * residuals[i];
            }
            residuals = next;
            if (Math.Sqrt(moved / Math.Max(1e-20, size)) <= accuracy)
                return new RobustFit(true, coefficients, scale, weights, residuals);
        }
        return new RobustFit(false, coefficients, scale, weights, residuals);
    }

    private static double Weight(double u, RobustLoss loss)
    {
        double a = Math.Abs(u);
        if (loss == RobustLoss.Huber)
            return a <= HuberBound ? 1 : HuberBound / a;
        double t = u / BisquareBound;
        return a < BisquareBound ? (1 - t * t) * (1 - t * t) : 0;
    }

    private static double[] Solve(IReadOnlyList<double[]> design, double[] reading, double[] weights)
    {
        var root = Array.ConvertAll(weights, Math.Sqrt);
        var x = Matrix<double>.Build.Dense(reading.Length, design.Count, (i, j) => root[i] * design[j][i]);
        var qr = x.QR(QRMethod.Thin);
        for (int j = 0; j < design.Count; j++)
            if (!(Math.Abs(qr.R[j, j]) > 1e-11 * x.Column(j).L2Norm()))
                throw new ArgumentException($"column {j} of the design follows from the columns before it", nameof(design));
        return qr.Solve(Vector<double>.Build.Dense(reading.Length, i => root[i] * reading[i])).ToArray();
    }

    private static double[] Residuals(IReadOnlyList<double[]> design, double[] reading, double[] coefficients)
    {
        var residuals = (double[])reading.Clone();
        for (int j = 0; j < coefficients.Length; j++)
            for (int i = 0; i < residuals.Length; i++)
                residuals[i] -= coefficients[j] * design[j][i];
        return residuals;
    }
}
