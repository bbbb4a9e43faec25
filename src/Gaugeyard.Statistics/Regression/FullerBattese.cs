namespace Gaugeyard.Statistics.Regression;

/// <summary>
/// Makes repeat runs comparable to independent ones for selection (Fuller and Battese 1973, JASA 68:626-632): from every value
/// a share of its vehicle's mean is taken away, the intercept column included.
/// </summary>
public static class FullerBattese
{
    /// <summary>Share per record: 1 - sqrt(within / (within + n_v between)).</summary>
    public static double[] Shares(int[] vehicles, double between, double within)
    {
        var sizes = vehicles.GroupBy(v => v).ToDictionary(g => g.Key, g => g.Count());
        return [.. vehicles.Select(v => within <= 0 ? 1 - 1e-9 : 1 - Math.Sqrt(within / (within + sizes[v] * between)))];
    }

    /// <summary>value - share x vehicle mean.</summary>
    public static double[] Transform(double[] values, int[] vehicles, double[] shares)
    {
        var sums = new Dictionary<int, (double Sum, int Count)>();
        for (int i = 0; i < values.Length; i++)
        {
            var (sum, count) = sums.GetValueOrDefault(vehicles[i]);
            sums[vehicles[i]] = (sum + values[i], count + 1);
        }
        return [.. values.Select((v, i) => v - shares[i] * sums[vehicles[i]].Sum / sums[vehicles[i]].Count)];
    }
}
