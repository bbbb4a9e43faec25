using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class MinimumCovarianceDeterminantTests
{
    [Fact]
    public void Affine_maps_of_a_reading_change_no_distance()
    {
        double[][] x = Normal(200, 3, 5);
        var a = MinimumCovarianceDeterminant.Estimate(x);
        var b = MinimumCovarianceDeterminant.Estimate([Array.ConvertAll(x[0], v => 1e4 + 37 * v), Array.ConvertAll(x[1], v => -0.002 * v), x[2]]);

        Assert.Equal(a.Subset, b.Subset);
        for (int i = 0; i < a.N; i++)
        {
            Near(a.RawDistances[i], b.RawDistances[i], 1e-8, "raw");
            Near(a.Distances[i], b.Distances[i], 1e-8, "reweighted");
        }
        Near(a.LogDeterminant + 2 * Math.Log(37 * 0.002), b.LogDeterminant, 1e-9, "determinant");
    }

    [Fact]
    public void Mixing_the_readings_keeps_the_answer_where_the_structure_is_clear()
    {
        double[][] x = Contaminated(300, 3, 60, 9);
        double[][] mixed = [Mix(x, 1, 2, 0), Mix(x, 0, 1, -1), Mix(x, 3, 0, 1)];
        var a = MinimumCovarianceDeterminant.Estimate(x);
        var b = MinimumCovarianceDeterminant.Estimate(mixed);

        Assert.Equal(a.Subset, b.Subset);
        for (int i = 0; i < a.N; i++)
            Near(a.RawDistances[i], b.RawDistances[i], 1e-7, "raw");
    }

    [Fact]
    public void Row_order_does_not_matter_on_many_records()
    {
        double[][] x = Contaminated(900, 2, 200, 3);
        int[] order = [.. Enumerable.Range(0, 900)];
        new RandomStream(4, 1, 1).Shuffle<int>(order);
        var a = MinimumCovarianceDeterminant.Estimate(x);
        var b = MinimumCovarianceDeterminant.Estimate([.. x.Select(c => order.Select(i => c[i]).ToArray())]);
        for (int i = 0; i < 900; i++)
            Near(a.Distances[order[i]], b.Distances[i], 1e-8, "distance");
    }

    [Theory]
    [InlineData(100, 2, 40)]
    [InlineData(2000, 4, 800)]
    [InlineData(30_000, 3, 12_000)]
    public void Forty_per_cent_of_wild_records_are_told_apart(int n, int p, int wild)
    {
        double[][] x = Contaminated(n, p, wild, 11);
        var r = MinimumCovarianceDeterminant.Estimate(x);
        double m = DistanceCut.DegreesOfFreedom(n, p);
        double[] q = AdjustedP.FalseDiscovery(Array.ConvertAll(r.RawDistances, d => DistanceCut.UpperTail(d, p, m)));
        Assert.All(Enumerable.Range(0, wild), i => Assert.True(q[i] < 0.05));
        Assert.True(Enumerable.Range(wild, n - wild).Count(i => q[i] < 0.05) < 0.06 * wild + 4);
    }

    [Fact]
    public void One_reading_is_solved_exactly()
    {
        double[] x = [3, 9, 4.5, 100, 4, 3.9, 5, -50, 4.2];
        var r = MinimumCovarianceDeterminant.Estimate([x]);
        // h = floor((9 + 1 + 1) / 2) = 5 of 9; by hand: 3.9 4 4.2 4.5 5 is the run of five with the smallest variance
        Assert.Equal(5, r.H);
        Assert.Equal([2, 4, 5, 6, 8], r.Subset);
        Near(4.32, r.RawCenter[0], 1e-14, "center");
        Near(0.197, r.SubsetCovariance[0, 0], 1e-12, "variance");
    }

    [Fact]
    public void Data_that_cannot_carry_it_get_a_reason()
    {
        double[] line = [.. Enumerable.Range(0, 40).Select(i => (double)i)];
        Assert.Equal(McdStatus.TooFew, MinimumCovarianceDeterminant.Estimate([[1, 2, 3, 4], [4, 3, 1, 2]]).Status);
        Assert.Equal(McdStatus.Constant, MinimumCovarianceDeterminant.Estimate([line, Array.ConvertAll(line, v => v < 25 ? 7.0 : v)]).Status);
        Assert.Equal(McdStatus.OnAPlane, MinimumCovarianceDeterminant.Estimate([line, Array.ConvertAll(line, v => 3 * v - 2)]).Status);
        var plane = MinimumCovarianceDeterminant.Estimate([line, Array.ConvertAll(line, v => v < 35 ? 2 * v : 1)]);
        Assert.Equal(McdStatus.OnAPlane, plane.Status);
        Assert.NotEqual("", plane.Reason);
        Assert.Equal(McdStatus.TooFew, MinimumCovarianceDeterminant.Estimate([[]]).Status);
    }

    [Fact]
    public void Mistakes_of_the_caller_are_told_with_both_numbers()
    {
        Assert.Contains("length 3 but has 2", Assert.Throws<ArgumentException>(() => MinimumCovarianceDeterminant.Estimate([[1, 2, 3], [1, 2]])).Message, StringComparison.Ordinal);
        Assert.Throws<ArgumentException>(() => MinimumCovarianceDeterminant.Estimate([[1, double.NaN, 3]]));
        Assert.Throws<ArgumentException>(() => MinimumCovarianceDeterminant.Estimate([[1, 2, 3]], new McdOptions { Alpha = 0.4 }));
    }

    [Fact]
    public void It_can_be_stopped()
    {
        using var stop = new CancellationTokenSource();
        stop.Cancel();
        Assert.ThrowsAny<OperationCanceledException>(() => MinimumCovarianceDeterminant.Estimate(Normal(100, 2, 1), cancel: stop.Token));
    }

    [Fact]
    public void The_same_seed_gives_the_same_bits()
    {
        double[][] x = Normal(80, 4, 2);
        Assert.Equal(MinimumCovarianceDeterminant.Estimate(x, new McdOptions { Seed = 5 }).Distances, MinimumCovarianceDeterminant.Estimate(x, new McdOptions { Seed = 5 }).Distances);
    }

    [Fact]
    public void The_whole_sample_gives_the_classical_covariance()
    {
        double[][] x = Normal(50, 2, 6);
        var r = MinimumCovarianceDeterminant.Estimate(x, new McdOptions { Alpha = 1 });
        double m0 = x[0].Average(), m1 = x[1].Average();
        Assert.Equal(50, r.H);
        Near(x[0].Zip(x[1], (a, b) => (a - m0) * (b - m1)).Sum() / 49, r.SubsetCovariance[0, 1], 1e-10, "covariance");
        Assert.Equal(1, r.RawConsistency);
    }

    internal static double[][] Normal(int n, int p, ulong seed)
    {
        var stream = new RandomStream(seed, 77, 0);
        var x = new double[p][];
        for (int j = 0; j < p; j++)
        {
            x[j] = new double[n];
            for (int i = 0; i < n; i++)
                x[j][i] = stream.NextNormal() + (j > 0 ? 0.8 * x[j - 1][i] : 0);
        }
        return x;
    }

    private static double[][] Contaminated(int n, int p, int wild, ulong seed)
    {
        double[][] x = Normal(n, p, seed);
        for (int i = 0; i < wild; i++)
            for (int j = 0; j < p; j++)
                x[j][i] = 0.3 * x[j][i] + (j % 2 == 0 ? 12 : -9);
        return x;
    }

    private static double[] Mix(double[][] x, double a, double b, double c) => [.. x[0].Select((v, i) => a * v + b * x[1][i] + c * x[2][i])];
}
