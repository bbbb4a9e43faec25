namespace Gaugeyard.DemoSeason;

/// <summary>
/// Random numbers for the demo season: SplitMix64 (Steele, Lea and Flood 2014, "Fast splittable pseudorandom number
/// generators", OOPSLA). Normals are sums of uniforms, so that only additions are involved and every machine draws the
/// same season.
/// </summary>
internal sealed class Dice(ulong seed)
{
    private ulong _state = seed;

    public ulong Bits()
    {
        ulong z = _state += 0x9E3779B97F4A7C15;
        z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9;
        z = (z ^ (z >> 27)) * 0x94D049BB133111EB;
        return z ^ (z >> 31);
    }

    /// <summary>Uniform on [0, 1).</summary>
    public double Unit() => (Bits() >> 11) * (1.0 / (1UL << 53));

    public double Between(double low, double high) => low + (high - low) * Unit();

    /// <summary>0 .. bound - 1.</summary>
    public int Below(int bound) => (int)(Unit() * bound);

    public bool Chance(double p) => Unit() < p;

    public T Pick<T>(IReadOnlyList<T> items) => items[Below(items.Count)];

    /// <summary>Close to standard normal, never beyond 6 (sum of twelve uniforms, Irwin and Hall 1927).</summary>
    public double Normal()
    {
        double sum = -6;
        for (int i = 0; i < 12; i++)
            sum += Unit();
        return sum;
    }

    /// <summary>The index that the weights draw.</summary>
    public int Weighted(IReadOnlyList<double> weights)
    {
        double left = Unit() * weights.Sum();
        for (int i = 0; i < weights.Count - 1; i++)
            if ((left -= weights[i]) < 0)
                return i;
        return weights.Count - 1;
    }
}
