using System.Numerics.Tensors;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// The operator L of a smoother (fitted = L y) by its rows, each zero outside First .. Last - 1, and the two moments of I - L on
/// which residual scale and degrees of freedom rest (Cleveland and Devlin 1988, JASA 83:596-610).
/// </summary>
internal sealed class LocalOperator(int count, Func<int, (int First, int Last)> window, LocalOperator.RowWriter write)
{
    private const int Exact = 1500, Blocks = 8;

    /// <summary>Writes the entries First .. Last - 1 of row i.</summary>
    public delegate void RowWriter(int i, Span<double> row);

    /// <summary>Squared norm of each row, with entry j divided by the weight of record j.</summary>
    public double[] Norms(double[]? weights, CancellationToken cancel)
    {
        var norms = new double[count];
        Parallel.For(0, count, Threads(cancel), () => new double[count], (i, _, buffer) =>
        {
            var (first, last) = window(i);
            var row = buffer.AsSpan(0, last - first);
            write(i, row);
            if (weights is null)
            {
                norms[i] = TensorPrimitives.SumOfSquares<double>(row);
                return buffer;
            }
            double sum = 0;
            for (int k = 0; k < row.Length; k++)
                if (row[k] != 0)
                    sum += row[k] * row[k] / weights[first + k];
            norms[i] = sum;
            return buffer;
        }, _ => { });
        return norms;
    }

    /// <summary>
    /// Trace of ((I - L)(I - L)')^2, exact to n = 1,500; beyond that the mean of |(I - L)'(I - L) z|^2 over random signs z
    /// (Hutchinson 1990), 20 of them, whose relative error is some 1e-4.
    /// </summary>
    public double SecondMoment(ulong seed, CancellationToken cancel)
    {
        if (count > Exact)
            return BySigns(20, seed, cancel);
        // rows of I - L
        var rows = new double[count][];
        Parallel.For(0, count, Threads(cancel), i =>
        {
            var (first, last) = window(i);
            var row = new double[last - first];
            write(i, row);
            TensorPrimitives.Negate(row, row);
            row[i - first] += 1;
            rows[i] = row;
        });
        var sums = new double[count];
        Parallel.For(0, count, Threads(cancel), i =>
        {
            var (first, last) = window(i);
            double sum = 0;
            for (int j = i; j < count; j++)
            {
                var (from, to) = window(j);
                int a = Math.Max(first, from), b = Math.Min(last, to);
                if (a >= b)
                    continue;
                double dot = TensorPrimitives.Dot<double>(rows[i].AsSpan(a - first, b - a), rows[j].AsSpan(a - from, b - a));
                sum += (i == j ? 1 : 2) * dot * dot;
            }
            sums[i] = sum;
        });
        return Sums.Of(sums);
    }

    private double BySigns(int vectors, ulong seed, CancellationToken cancel)
    {
        var signs = new double[vectors][];
        for (int v = 0; v < vectors; v++)
        {
            var random = new RandomStream(seed, 0xD2, (ulong)v);
            signs[v] = new double[count];
            for (int i = 0; i < count; i++)
                signs[v][i] = (random.NextWord() & 1) == 0 ? -1 : 1;
        }
        // fixed blocks of rows, so that the sums do not depend on the number of threads
        var back = new double[Blocks][][];
        Parallel.For(0, Blocks, Threads(cancel), block =>
        {
            var own = new double[vectors][];
            for (int v = 0; v < vectors; v++)
                own[v] = new double[count];
            var buffer = new double[count];
            for (int i = (int)((long)count * block / Blocks); i < (int)((long)count * (block + 1) / Blocks); i++)
            {
                cancel.ThrowIfCancellationRequested();
                var (first, last) = window(i);
                var row = buffer.AsSpan(0, last - first);
                write(i, row);
                for (int v = 0; v < vectors; v++)
                {
                    double rest = signs[v][i] - TensorPrimitives.Dot<double>(row, signs[v].AsSpan(first, row.Length));
                    var target = own[v].AsSpan(first, row.Length);
                    TensorPrimitives.MultiplyAdd(row, -rest, target, target);
                    own[v][i] += rest;
                }
            }
            back[block] = own;
        });
        double sum = 0;
        for (int v = 0; v < vectors; v++)
            for (int i = 0; i < count; i++)
            {
                double total = 0;
                for (int block = 0; block < Blocks; block++)
                    total += back[block][v][i];
                sum += total * total;
            }
        return sum / vectors;
    }

    private static ParallelOptions Threads(CancellationToken cancel) => new() { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount };
}
