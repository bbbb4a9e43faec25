using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Resampling;

/// <summary>Draws units with replacement.</summary>
public static class ResampleCounts
{
    private const uint Task = 0xB007;

    /// <summary>How often each record is in resample b: its unit is drawn whole.</summary>
    /// <param name="unitOf">Unit code 0 .. U-1 of each record (the vehicle, or the record itself).</param>
    /// <param name="units">Number of units U.</param>
    public static int[] Of(ReadOnlySpan<int> unitOf, int units, ulong seed, int b)
    {
        var random = new RandomStream(seed, Task, (ulong)b);
        var drawn = new int[units];
        for (int k = 0; k < units; k++)
            drawn[random.NextInt(units)]++;
        var counts = new int[unitOf.Length];
        for (int i = 0; i < counts.Length; i++)
            counts[i] = drawn[unitOf[i]];
        return counts;
    }

    /// <summary>Random multiplier per unit for the wild bootstrap: Webb's six points up to 12 units (Webb 2014), else Mammen's two (1993, Annals of Statistics 21:255-285).</summary>
    public static double[] Multipliers(int units, ulong seed, int b)
    {
        var random = new RandomStream(seed, Task + 1, (ulong)b);
        var multipliers = new double[units];
        double[] six = [-Math.Sqrt(1.5), -1, -Math.Sqrt(0.5), Math.Sqrt(0.5), 1, Math.Sqrt(1.5)];
        double root = Math.Sqrt(5), share = (root + 1) / (2 * root);
        for (int k = 0; k < units; k++)
            multipliers[k] = units <= 12 ? six[random.NextInt(6)] : random.NextDouble() < share ? (1 - root) / 2 : (1 + root) / 2;
        return multipliers;
    }
}
