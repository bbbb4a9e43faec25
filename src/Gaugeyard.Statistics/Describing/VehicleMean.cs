using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Describing;

/// <summary>
/// Mean of all runs, and total fuel over total distance, with intervals that know that runs of one vehicle belong together:
/// CR2 variance (Bell and McCaffrey 2002, Survey Methodology 28:169-181) with Satterthwaite degrees of freedom (Pustejovsky and
/// Tipton 2018, J. Business and Economic Statistics 36:672-683). With one run per vehicle it is the t interval exactly.
/// </summary>
public static class VehicleMean
{
    /// <summary>Mean over all runs.</summary>
    /// <param name="values">Finite values, length n.</param>
    /// <param name="vehicles">Vehicle code 0 .. V-1 of each value; codes without a value are allowed.</param>
    /// <param name="confidence">In (0, 1).</param>
    /// <returns>The interval; without degrees of freedom when fewer than two vehicles have values.</returns>
    public static MeanInterval OfRuns(ReadOnlySpan<double> values, ReadOnlySpan<int> vehicles, double confidence)
    {
        var (sizes, means) = Means(values, vehicles);
        double total = values.Length, mean = Sums.Mean(values);
        int present = sizes.Count(n => n > 0);
        if (present < 2)
            return MeanInterval.Of(mean, double.NaN, double.NaN, confidence);
        double variance = 0;
        for (int j = 0; j < sizes.Length; j++)
            if (sizes[j] > 0)
                variance += (double)sizes[j] * sizes[j] * (means[j] - mean) * (means[j] - mean) / (1 - sizes[j] / total);
        return MeanInterval.Of(mean, Math.Sqrt(variance) / total, SatterthwaiteDf([.. sizes.Select(n => (double)n)]), confidence);
    }

    /// <summary>Ratio of sums, for example total fuel / total distance: linearised, with the vehicle as unit.</summary>
    /// <param name="numerators">Per run, for example fuel.</param>
    /// <param name="denominators">Per run, positive, for example distance.</param>
    public static MeanInterval OfTotals(ReadOnlySpan<double> numerators, ReadOnlySpan<double> denominators, ReadOnlySpan<int> vehicles, double confidence)
    {
        if (numerators.Length != denominators.Length || vehicles.Length != numerators.Length)
            throw new ArgumentException($"numerators, denominators and vehicles must have one length but have {numerators.Length}, {denominators.Length} and {vehicles.Length}");
        double bottom = Sums.Of(denominators), ratio = Sums.Of(numerators) / bottom;
        int count = vehicles.Length == 0 ? 0 : Max(vehicles) + 1;
        var errors = new double[count];
        var sizes = new double[count];
        for (int i = 0; i < numerators.Length; i++)
        {
            errors[vehicles[i]] += numerators[i] - ratio * denominators[i];
            sizes[vehicles[i]] += denominators[i];
        }
        if (sizes.Count(d => d > 0) < 2)
            return MeanInterval.Of(ratio, double.NaN, double.NaN, confidence);
        double variance = 0;
        for (int j = 0; j < count; j++)
            if (sizes[j] > 0)
                variance += errors[j] * errors[j] / (1 - sizes[j] / bottom);
        return MeanInterval.Of(ratio, Math.Sqrt(variance) / bottom, SatterthwaiteDf(sizes), confidence);
    }

    /// <summary>Mean of each vehicle that has a value, in code order, with the vehicle codes.</summary>
    public static (double[] Means, int[] Codes) OfEach(ReadOnlySpan<double> values, ReadOnlySpan<int> vehicles)
    {
        var (sizes, means) = Means(values, vehicles);
        int[] codes = [.. Enumerable.Range(0, sizes.Length).Where(j => sizes[j] > 0)];
        return ([.. codes.Select(j => means[j])], codes);
    }

    /// <summary>Degrees of freedom for a mean of clusters of these sizes (weights); equal sizes give clusters - 1.</summary>
    internal static double SatterthwaiteDf(ReadOnlySpan<double> sizes)
    {
        double total = Sums.Of(sizes), a = 0, b = 0, c = 0;
        foreach (double n in sizes)
        {
            if (n <= 0)
                continue;
            double rest = total - n;
            a += n * n / (rest * rest);
            b += n * n * n / (rest * rest);
            c += n * n / rest;
        }
        return total * total / (total * total * a - 2 * total * b + c * c);
    }

    private static (int[] Sizes, double[] Means) Means(ReadOnlySpan<double> values, ReadOnlySpan<int> vehicles)
    {
        if (values.Length != vehicles.Length)
            throw new ArgumentException($"vehicles must have length {values.Length} but has {vehicles.Length}");
        int count = vehicles.Length == 0 ? 0 : Max(vehicles) + 1;
        var sizes = new int[count];
        var sums = new double[count];
        var lost = new double[count];
        for (int i = 0; i < values.Length; i++)
        {
            int j = vehicles[i];
            double next = sums[j] + values[i];
            lost[j] += Math.Abs(sums[j]) >= Math.Abs(values[i]) ? sums[j] - next + values[i] : values[i] - next + sums[j];
            sums[j] = next;
            sizes[j]++;
        }
        for (int j = 0; j < count; j++)
            sums[j] = (sums[j] + lost[j]) / sizes[j];
        return (sizes, sums);
    }

    private static int Max(ReadOnlySpan<int> codes)
    {
        int max = codes[0];
        foreach (int c in codes)
            max = Math.Max(max, c);
        return max;
    }
}
