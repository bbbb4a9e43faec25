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

        // its slope in the ratio: the smoothness of a minimum hides half the digits of its place, a root of the slope shows all
        double Slope(double ratio)
        {
            double weights = 0, squaredWeights = 0, mean = 0;
            for (int k = 0; k < groups; k++)
            {
                double w = sizes[k] / (1 + sizes[k] * ratio);
                weights += w;
                squaredWeights += w * w;
                mean += w * means[k];
            }
            mean /= weights;
            double squares = within, fall = 0;
            for (int k = 0; k < groups; k++)
            {
                double w = sizes[k] / (1 + sizes[k] * ratio), part = w * (means[k] - mean) * (means[k] - mean);
                squares += part;
                fall += w * part;
            }
            return weights - squaredWeights / weights - (n - 1) * fall / squares;
        }

        if (within == 0)
        {
            double grand = Numerics.Sums.Mean(means);
            return new VarianceSplit(means.Sum(m => (m - grand) * (m - grand)) / (groups - 1), 0, 0);
        }
        // every minimum of the criterion over ln ratio, by the sign of its slope; a ratio of 0 competes with them
        double ratioAt = 0, lowest = Criterion(0, out _);
        const double First = -27, Last = 50, GridStep = 0.25;
        double left = First, leftSlope = Slope(Math.Exp(First));
        for (double right = First + GridStep; right <= Last; right += GridStep)
        {
            double rightSlope = Slope(Math.Exp(right));
            if (leftSlope < 0 && rightSlope >= 0)
            {
                double a = left, b = right;
                for (int i = 0; i < 60; i++)
                {
                    double middle = 0.5 * (a + b);
                    if (Slope(Math.Exp(middle)) < 0)
                        a = middle;
                    else
                        b = middle;
                }
                double ratio = Math.Exp(0.5 * (a + b)), value = Criterion(ratio, out _);
                if (value < lowest)
                    (ratioAt, lowest) = (ratio, value);
            }
            (left, leftSlope) = (right, rightSlope);
        }
        Criterion(ratioAt, out double sigma2);
        return new VarianceSplit(ratioAt * sigma2, sigma2, pooled);
    }
}
