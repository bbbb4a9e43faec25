using BenchmarkDotNet.Attributes;
using Gaugeyard.Statistics.Resampling;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Benchmarks.Smoothing;

/// <summary>Hot paths of curves, on y = sin x + noise with one predictor.</summary>
[SimpleJob(iterationCount: 5)]
public class CurveBenchmarks
{
    private double[] _x = [], _y = [], _shortX = [], _shortY = [], _long = [], _longY = [];
    private int[] _units = [];

    [GlobalSetup]
    public void Make()
    {
        (_x, _y) = Data(20_000);
        (_shortX, _shortY) = Data(1_000);
        (_long, _longY) = Data(100_000);
        _units = [.. Enumerable.Range(0, 1_000)];
    }

    /// <summary>Exact local quadratic at all of 20,000 points, span 0.5.</summary>
    [Benchmark]
    public double[] LocalQuadratic() => LocalRegression.Of([_x], _y, new LocalRegressionOptions { Span = 0.5 }).Fit!.FittedValues();

    /// <summary>Leave-one-out by true deletion over 20 spans, n = 1,000.</summary>
    [Benchmark]
    public double LeaveOneOut() => Enumerable.Range(1, 20).Sum(k => LocalRegression.Of([_shortX], _shortY, new LocalRegressionOptions { Degree = 1, Span = 0.05 * k }).Fit!.LeaveOneOut()[0]);

    /// <summary>1,000 resamples of 1,000 records at 100 points.</summary>
    [Benchmark]
    public int Resamples()
    {
        double[] at = [.. Enumerable.Range(0, 100).Select(i => 0.05 + i * 0.099)];
        return LocalBootstrap.Curves(_shortX, _shortY, null, at, new LocalRegressionOptions { Span = 0.5 }, b => ResampleCounts.Of(_units, _units.Length, 1, b), 1000).Count;
    }

    /// <summary>Trace, residual scale and degrees of freedom of 20,000 records.</summary>
    [Benchmark]
    public double Scale() => LocalRegression.Of([_x], _y, new LocalRegressionOptions { Span = 0.5 }).Fit!.Statistics().S;

    /// <summary>Smoothing spline with a knot at each of 100,000 values, stiffness by generalised cross-validation.</summary>
    [Benchmark]
    public double Spline() => SmoothingSpline.Of(_long, _longY).Problem!.Choose().Df;

    private static (double[], double[]) Data(int n)
    {
        var random = new Random(3);
        double[] x = [.. Enumerable.Range(0, n).Select(_ => 10 * random.NextDouble())];
        return (x, [.. x.Select(v => Math.Sin(v) + random.NextDouble() - 0.5)]);
    }
}
