namespace Gaugeyard.Statistics.Numerics;

/// <summary>Sums that do not lose digits: Neumaier's compensated summation (Neumaier 1974, ZAMM 54:39-51).</summary>
public static class Sums
{
    /// <summary>Compensated sum; O(n).</summary>
    public static double Of(ReadOnlySpan<double> values)
    {
        double sum = 0, lost = 0;
        foreach (double v in values)
        {
            double next = sum + v;
            lost += Math.Abs(sum) >= Math.Abs(v) ? sum - next + v : v - next + sum;
            sum = next;
        }
        return sum + lost;
    }

    /// <summary>Compensated mean with one correction pass, exact to the last digit or two; NaN for no values.</summary>
    public static double Mean(ReadOnlySpan<double> values)
    {
        if (values.IsEmpty)
            return double.NaN;
        double mean = Of(values) / values.Length, sum = 0, lost = 0;
        foreach (double v in values)
        {
            double d = v - mean, next = sum + d;
            lost += Math.Abs(sum) >= Math.Abs(d) ? sum - next + d : d - next + sum;
            sum = next;
        }
        return mean + (sum + lost) / values.Length;
    }
}
