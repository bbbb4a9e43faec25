using BenchmarkDotNet.Attributes;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Benchmarks.Outliers;

/// <summary>Robust covariance of 10,000 records and six readings; correlations and matrix points of a million records.</summary>
[MemoryDiagnoser]
public class OutlierBenchmarks
{
    private const int Few = 10_000, Many = 1_000_000, Readings = 6;
    private double[][] _few = [], _many = [];
    private RevisionContent _content = null!;

    [GlobalSetup]
    public void Setup()
    {
        _few = Draw(Few);
        // one record in twenty is wild
        foreach (double[] x in _few)
            for (int i = 0; i < Few / 20; i++)
                x[i] += 5;
        _many = Draw(Many);
        for (int i = 0; i < Many; i += 33)
            _many[i % Readings][i] = double.NaN;
        _content = RevisionContent.InMemory([.. _many.Select((x, j) => new NumberColumn(new ColumnDefinition($"R{j}", ColumnKind.Number), x))]);
    }

    [Benchmark]
    public double RobustCovariance() => MinimumCovarianceDeterminant.Estimate(_few).LogDeterminant;

    [Benchmark]
    public double LinearCorrelations() => Correlations.Pearson(_many).R[0, 1];

    [Benchmark]
    public double RankCorrelations() => Correlations.Spearman(_many).R[0, 1];

    [Benchmark]
    public int MatrixPoints() => new PointsQuestion { Readings = [.. Enumerable.Range(0, Readings).Select(j => $"R{j}")] }.Collect(_content).Records.Length;

    /// <summary>Normal readings that share half of their variance.</summary>
    private static double[][] Draw(int n)
    {
        var random = new RandomStream(5, 1, (ulong)n);
        double[][] x = [.. Enumerable.Range(0, Readings).Select(_ => new double[n])];
        for (int i = 0; i < n; i++)
        {
            double shared = random.NextNormal();
            foreach (double[] column in x)
                column[i] = Math.Sqrt(0.5) * (shared + random.NextNormal());
        }
        return x;
    }
}
