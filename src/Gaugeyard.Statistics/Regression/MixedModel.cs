using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Regression;

/// <summary>A linear model with a random intercept per vehicle.</summary>
/// <param name="Beta">Intercept, then one slope per column (0 for aliased ones).</param>
/// <param name="Between">Variance of vehicle effects.</param>
/// <param name="Within">Residual variance.</param>
/// <param name="Effects">Predicted effect per vehicle code.</param>
public sealed record MixedFit(double[] Beta, double Between, double Within, IReadOnlyDictionary<int, double> Effects, IReadOnlyDictionary<int, int> Runs)
{
    /// <summary>Value for a row of column values, with the effect of its vehicle when that is known.</summary>
    public double Predict(ReadOnlySpan<double> row, int? vehicle)
    {
        double value = Beta[0];
        for (int j = 0; j < row.Length; j++)
            value += Beta[j + 1] * row[j];
        return vehicle is { } v && Effects.TryGetValue(v, out double effect) ? value + effect : value;
    }
}

/// <summary>
/// Vehicle effect and covariates by restricted maximum likelihood (Patterson and Thompson 1971; Henderson 1975 for the
/// predicted effects), profiled over the ratio of variances.
/// </summary>
public static class MixedModel
{
    /// <summary>Fits the model; null when no vehicle has two records or there are fewer than two vehicles.</summary>
    /// <param name="columns">Columns without the intercept.</param>
    public static MixedFit? Of(IReadOnlyList<double[]> columns, double[] y, int[] vehicles, CancellationToken cancel = default)
    {
        int n = y.Length;
        int[] groups = [.. vehicles.Distinct().Order()];
        if (groups.Length < 2 || groups.Length == n)
            return null;
        // columns centred and scaled; those that say nothing are left at zero slope
        double[] means = [.. columns.Select(c => Numerics.Sums.Mean(c))];
        double[] scales = [.. columns.Select((c, j) => HouseholderQr.Norm([.. c.Select(v => v - means[j])]))];
        var scaled = columns.Select((c, j) => c.Select(v => scales[j] > 1e-13 * Math.Abs(means[j]) * Math.Sqrt(n) ? (v - means[j]) / scales[j] : 0).ToArray()).ToArray();
        int[] kept = new HouseholderQr([.. scaled.Select(c => (double[])c.Clone())], 1e-9, cancel).Kept;
        int p = kept.Length + 1;
        if (n <= p + 1)
            return null;
        double yMean = Numerics.Sums.Mean(y);
        var place = groups.Select((g, k) => (g, k)).ToDictionary(x => x.g, x => x.k);
        var sizes = new double[groups.Length];
        var sums = new double[groups.Length, p + 1];
        var total = Matrix<double>.Build.Dense(p + 1, p + 1);
        var row = new double[p + 1];
        for (int i = 0; i < n; i++)
        {
            row[0] = 1;
            for (int j = 0; j < kept.Length; j++)
                row[j + 1] = scaled[kept[j]][i] * Math.Sqrt(n);
            row[p] = y[i] - yMean;
            int g = place[vehicles[i]];
            sizes[g]++;
            for (int a = 0; a <= p; a++)
            {
                sums[g, a] += row[a];
                for (int b = 0; b <= a; b++)
                    total[a, b] += row[a] * row[b];
            }
        }

        // X'V^-1X with V = I + ratio J: total products minus a shrunken part of each vehicle's
        (double Criterion, double[] Beta, double Squares) At(double ratio)
        {
            var m = total.Clone();
            double logs = 0;
            for (int g = 0; g < groups.Length; g++)
            {
                double w = ratio / (1 + sizes[g] * ratio);
                logs += Math.Log(1 + sizes[g] * ratio);
                for (int a = 0; a <= p; a++)
                    for (int b = 0; b <= a; b++)
                        m[a, b] -= w * sums[g, a] * sums[g, b];
            }
            var l = Matrix<double>.Build.Dense(p, p);
            double logDet = 0;
            var beta = new double[p];
            // Cholesky of the products with the right-hand side carried along
            var z = new double[p];
            for (int j = 0; j < p; j++)
            {
                double d = m[j, j];
                for (int k = 0; k < j; k++)
                    d -= l[j, k] * l[j, k];
                d = Math.Sqrt(Math.Max(d, 1e-300));
                l[j, j] = d;
                logDet += 2 * Math.Log(d);
                for (int i = j + 1; i < p; i++)
                {
                    double s = m[i, j];
                    for (int k = 0; k < j; k++)
                        s -= l[i, k] * l[j, k];
                    l[i, j] = s / d;
                }
                double r = m[p, j];
                for (int k = 0; k < j; k++)
                    r -= l[j, k] * z[k];
                z[j] = r / d;
            }
            for (int j = p - 1; j >= 0; j--)
            {
                double s = z[j];
                for (int i = j + 1; i < p; i++)
                    s -= l[i, j] * beta[i];
                beta[j] = s / l[j, j];
            }
            double squares = Math.Max(m[p, p] - z.Sum(v => v * v), 1e-300 * (1 + m[p, p]));
            return ((n - p) * Math.Log(squares) + logs + logDet, beta, squares);
        }

        const int Grid = 24;
        int best = 0;
        double bestValue = double.PositiveInfinity;
        for (int i = 0; i < Grid; i++)
        {
            cancel.ThrowIfCancellationRequested();
            double u = i / (double)Grid, value = At(u / (1 - u)).Criterion;
            if (value < bestValue)
                (best, bestValue) = (i, value);
        }
        double low = Math.Max(0, best - 1) / (double)Grid, high = Math.Min(Grid - 0.01, best + 1) / Grid;
        const double Golden = 0.3819660112501051;
        double x1 = low + Golden * (high - low), x2 = high - Golden * (high - low), f1 = At(x1 / (1 - x1)).Criterion, f2 = At(x2 / (1 - x2)).Criterion;
        for (int i = 0; i < 60 && high - low > 1e-10; i++)
        {
            if (f1 <= f2)
            {
                (high, x2, f2) = (x2, x1, f1);
                x1 = low + Golden * (high - low);
                f1 = At(x1 / (1 - x1)).Criterion;
            }
            else
            {
                (low, x1, f1) = (x1, x2, f2);
                x2 = high - Golden * (high - low);
                f2 = At(x2 / (1 - x2)).Criterion;
            }
        }
        double at = 0.5 * (low + high), ratioAt = at / (1 - at);
        if (At(0).Criterion <= At(ratioAt).Criterion)
            ratioAt = 0;
        var (_, b0, rest) = At(ratioAt);
        double within = rest / (n - p);
        var full = new double[columns.Count + 1];
        full[0] = yMean + b0[0];
        for (int j = 0; j < kept.Length; j++)
        {
            full[kept[j] + 1] = b0[j + 1] * Math.Sqrt(n) / scales[kept[j]];
            full[0] -= full[kept[j] + 1] * means[kept[j]];
        }
        var effects = new Dictionary<int, double>();
        var runs = new Dictionary<int, int>();
        for (int g = 0; g < groups.Length; g++)
        {
            double residual = sums[g, p];
            for (int a = 0; a < p; a++)
                residual -= b0[a] * sums[g, a];
            effects[groups[g]] = ratioAt / (1 + sizes[g] * ratioAt) * residual;
            runs[groups[g]] = (int)sizes[g];
        }
        return new MixedFit(full, ratioAt * within, within, effects, runs);
    }
}
