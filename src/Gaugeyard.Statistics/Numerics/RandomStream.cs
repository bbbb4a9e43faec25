namespace Gaugeyard.Statistics.Numerics;

/// <summary>
/// A counter-based stream of random numbers: Philox 4x32 with 10 rounds (Salmon, Moraes, Dror and Shaw 2011,
/// "Parallel random numbers: as easy as 1, 2, 3", SC'11). The stream is a pure function of seed, task and index, so
/// that work split over any number of threads gives the same bits. Not for cryptography. Not thread safe: one stream
/// belongs to one loop.
/// </summary>
public struct RandomStream
{
    private const uint Multiplier0 = 0xD2511F53, Multiplier1 = 0xCD9E8D57, Weyl0 = 0x9E3779B9, Weyl1 = 0xBB67AE85;
    private readonly uint _key0, _key1, _task, _index0, _index1;
    private uint _block, _w0, _w1, _w2, _w3;
    private int _left;

    /// <param name="seed">The seed that the result carries.</param>
    /// <param name="task">Which procedure or stage draws; keeps stages of one seed apart.</param>
    /// <param name="index">Which resample, fold or imputation draws.</param>
    public RandomStream(ulong seed, uint task, ulong index)
    {
        _key0 = (uint)seed;
        _key1 = (uint)(seed >> 32);
        _task = task;
        _index0 = (uint)index;
        _index1 = (uint)(index >> 32);
    }

    /// <summary>The next 32 random bits.</summary>
    public uint NextWord()
    {
        if (_left == 0)
        {
            (_w0, _w1, _w2, _w3) = Block(_block++, _task, _index0, _index1, _key0, _key1);
            _left = 4;
        }
        return _left-- switch { 4 => _w0, 3 => _w1, 2 => _w2, _ => _w3 };
    }

    /// <summary>Uniform on [0, 1) with 53 random bits, from two words (27 + 26 bits).</summary>
    public double NextDouble()
    {
        ulong high = NextWord() >> 5, low = NextWord() >> 6;
        return ((high << 26) | low) * (1.0 / (1UL << 53));
    }

    /// <summary>Uniform on 0 .. bound-1, without bias (rejection).</summary>
    /// <exception cref="ArgumentOutOfRangeException">bound is below 1.</exception>
    public int NextInt(int bound)
    {
        ArgumentOutOfRangeException.ThrowIfLessThan(bound, 1);
        uint range = (uint)bound, threshold = (0u - range) % range;
        while (true)
        {
            ulong product = (ulong)NextWord() * range;
            if ((uint)product >= threshold)
                return (int)(product >> 32);
        }
    }

    /// <summary>Standard normal by the inverse distribution function, so that one uniform gives one normal.</summary>
    public double NextNormal() => Probability.NormalQuantile(NextDouble() + 0.5 / (1UL << 53));

    /// <summary>Puts the items in random order (Fisher and Yates).</summary>
    public void Shuffle<T>(Span<T> items)
    {
        for (int i = items.Length - 1; i > 0; i--)
        {
            int j = NextInt(i + 1);
            (items[i], items[j]) = (items[j], items[i]);
        }
    }

    /// <summary>One Philox block: counter (c0..c3) under key (k0, k1).</summary>
    public static (uint, uint, uint, uint) Block(uint c0, uint c1, uint c2, uint c3, uint k0, uint k1)
    {
        for (int round = 0; round < 10; round++)
        {
            ulong p0 = (ulong)Multiplier0 * c0, p1 = (ulong)Multiplier1 * c2;
            (c0, c1, c2, c3) = ((uint)(p1 >> 32) ^ c1 ^ k0, (uint)p1, (uint)(p0 >> 32) ^ c3 ^ k1, (uint)p0);
            k0 += Weyl0;
            k1 += Weyl1;
        }
        return (c0, c1, c2, c3);
    }
}
