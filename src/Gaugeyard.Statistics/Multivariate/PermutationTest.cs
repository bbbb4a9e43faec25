using Gaugeyard.Statistics.Numerics;
using MathNet.Numerics.LinearAlgebra;

namespace Gaugeyard.Statistics.Multivariate;

/// <summary>Permutation test of the one-way multivariate comparison by Pillai's trace.</summary>
public static class PermutationTest
{
    private const uint Task = 0x9E41;

    /// <summary>p = (1 + permutations at least as extreme) / (permutations + 1). The total products stay, so each permutation costs n p.</summary>
    public static double Pillai(IReadOnlyList<double[]> rows, ReadOnlySpan<int> groups, int groupCount, int permutations, ulong seed, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        if (rows.Count != groups.Length)
            throw new ArgumentException($"groups must have length {rows.Count} but has {groups.Length}", nameof(groups));
        int n = rows.Count, p = rows[0].Length;
        var mean = new double[p];
        foreach (double[] row in rows)
            for (int j = 0; j < p; j++)
                mean[j] += row[j] / n;
        var centred = Matrix<double>.Build.Dense(n, p, (i, j) => rows[i][j] - mean[j]);
        // rotated so that the total products are the identity: the trace is then a plain sum of squares
        var total = centred.TransposeThisAndMultiply(centred).Cholesky().Factor;
        var whitened = (total.Inverse() * centred.Transpose()).Transpose().ToRowArrays();
        int[] code = groups.ToArray();
        var sizes = new double[groupCount];
        foreach (int g in code)
            sizes[g]++;

        double Trace(int[] codes)
        {
            var sums = new double[groupCount * p];
            for (int i = 0; i < n; i++)
                for (int j = 0; j < p; j++)
                    sums[codes[i] * p + j] += whitened[i][j];
            double trace = 0;
            for (int g = 0; g < groupCount; g++)
                for (int j = 0; j < p; j++)
                    trace += sums[g * p + j] * sums[g * p + j] / sizes[g];
            return trace;
        }

        double observed = Trace(code) * (1 - 1e-12);
        int extreme = 0, done = 0;
        Parallel.For(0, permutations, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            int[] shuffled = (int[])code.Clone();
            new RandomStream(seed, Task, (ulong)b).Shuffle<int>(shuffled);
            if (Trace(shuffled) >= observed)
                Interlocked.Increment(ref extreme);
            int k = Interlocked.Increment(ref done);
            if (k % 64 == 0)
                progress?.Report((double)k / permutations);
        });
        return (1.0 + extreme) / (permutations + 1.0);
    }
}
