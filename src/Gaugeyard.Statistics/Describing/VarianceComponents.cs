namespace Gaugeyard.Statistics.Describing;

/// <summary>Variance between vehicles and within a vehicle from run to run.</summary>
/// <param name="Between">Variance of vehicles' true means; 0 when the data show none.</param>
/// <param name="Within">Variance of runs of one vehicle.</param>
/// <param name="PooledWithin">Pooled within-vehicle variance, the repeatability variance of ISO 5725-2.</param>
public sealed record VarianceSplit(double Between, double Within, double PooledWithin)
{
    /// <summary>Repeatability limit 1.96 sqrt(2) s_r: two runs of one vehicle differ by less than this 95 times in 100.</summary>
    public double RepeatabilityLimit => 1.96 * Math.Sqrt(2 * PooledWithin);
}

/// <summary>One-way random effects by restricted maximum likelihood (Patterson and Thompson 1971, Biometrika 58:545-554).</summary>
public static class VarianceComponents
{
    /// <summary>Estimates the components.</summary>
    /// <param name="values">Finite values, length n.</param>
    /// <param name="vehicles">Vehicle code of each value.</param>
    /// <returns>Null when fewer than two vehicles, or no vehicle with two runs.</returns>
    public static VarianceSplit? Of(ReadOnlySpan<double> values, ReadOnlySpan<int> vehicles)
    {
        var (means, codes) = VehicleMean.OfEach(values, vehicles);
        var place = new Dictionary<int, int>();
        for (int k = 0; k < codes.Length; k++)
            place[codes[k]] = k;
        var sizes = new double[codes.Length];
        double within = 0;
        for (int i = 0; i < values.Length; i++)
        {
            int k = place[vehicles[i]];
            sizes[k]++;
            within += (values[i] - means[k]) * (values[i] - means[k]);
        }
        int groups = sizes.Length, n = values.Length;
        if (groups < 2 || n <= groups)
            return null;
        double pooled = within / (n - groups);
        if (sizes.All(s => s == sizes[0]))
        {
            double grand = Numerics.Sums.Mean(means), betweenSquares = means.Sum(m => (m - grand) * (m - grand)) * sizes[0];
            double msb = betweenSquares / (groups - 1);
            return msb > pooled
                ? new VarianceSplit((msb - pooled) / sizes[0], pooled, pooled)
                : new VarianceSplit(0, (betweenSquares + within) / (n - 1), pooled);
        }

        // profile criterion in the ratio between / within
        double Criterion(double ratio, out double scale)
        {
            double weights = 0, mean = 0, logs = 0;
            for (int k = 0; k < groups; k++)
            {
                double w = sizes[k] / (1 + sizes[k] * ratio);
                weights += w;
                mean += w * means[k];
                logs += Math.Log(1 + sizes[k] * ratio);
            }
            mean /= weights;
            double squares = within;
            for (int k = 0; k < groups; k++)
                squares += sizes[k] / (1 + sizes[k] * ratio) * (means[k] - mean) * (means[k] - mean);
            scale = squares / (n - 1);
            return (n - 1) * Math.Log(squares) + logs + Math.Log(weights);
        }

        if (within == 0)
        {
            double grand = Numerics.Sums.Mean(means);
            return new VarianceSplit(means.Sum(m => (m - grand) * (m - grand)) / (groups - 1), 0, 0);
        }
        // grid on u = ratio / (1 + ratio), then golden section in the best bracket
        int best = 0;
        double bestValue = double.PositiveInfinity;
        const int Grid = 200;
        for (int i = 0; i < Grid; i++)
        {
            double u = i / (double)Grid, value = Criterion(u / (1 - u), out _);
            if (value < bestValue)
                (best, bestValue) = (i, value);
        }
        double a = Math.Max(0, best - 1) / (double)Grid, b = Math.Min(Grid - 0.001, best + 1) / Grid;
        const double Golden = 0.3819660112501051;
        double x = a + Golden * (b - a), y = b - Golden * (b - a), fx = Criterion(x / (1 - x), out _), fy = Criterion(y / (1 - y), out _);
        for (int i = 0; i < 100 && b - a > 1e-14; i++)
        {
            if (fx <= fy)
            {
                (b, y, fy) = (y, x, fx);
                x = a + Golden * (b - a);
                fx = Criterion(x / (1 - x), out _);
            }
            else
            {
                (a, x, fx) = (x, y, fy);
                y = b - Golden * (b - a);
                fy = Criterion(y / (1 - y), out _);
            }
        }
        double at = 0.5 * (a + b);
        double ratioAt = Criterion(0, out _) <= Criterion(at / (1 - at), out _) ? 0 : at / (1 - at);
        Criterion(ratioAt, out double sigma2);
        return new VarianceSplit(ratioAt * sigma2, sigma2, pooled);
    }
}
