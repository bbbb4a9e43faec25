using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class RobustScaleTests
{
    /// <summary>The definitions, by all pairs.</summary>
    private static (double Qn, double Sn) Slow(double[] x)
    {
        int n = x.Length, h = n / 2 + 1;
        var differences = new List<double>();
        var inner = new List<double>();
        for (int i = 0; i < n; i++)
        {
            for (int j = i + 1; j < n; j++)
                differences.Add(Math.Abs(x[i] - x[j]));
            inner.Add(x.Select(v => Math.Abs(v - x[i])).Order().ElementAt(n / 2));
        }
        return (2.21914 * differences.Order().ElementAt(h * (h - 1) / 2 - 1), 1.1926 * inner.Order().ElementAt((n + 1) / 2 - 1));
    }

    [Fact]
    public void Quick_ways_agree_with_the_definitions()
    {
        var stream = new RandomStream(3, 5, 0);
        for (int n = 2; n < 60; n++)
        {
            // half of the samples with many ties
            var x = new double[n];
            for (int i = 0; i < n; i++)
                x[i] = n % 2 == 0 ? stream.NextNormal() : stream.NextInt(7);
            var (qn, sn) = Slow(x);
            Near(qn, RobustScale.Qn(x, corrected: false), 1e-14, $"Qn of {n}");
            Near(sn, RobustScale.Sn(x, corrected: false), 1e-14, $"Sn of {n}");
        }
    }

    [Fact]
    public void All_are_about_one_on_normal_values_and_move_with_the_unit()
    {
        var stream = new RandomStream(8, 5, 1);
        var x = new double[20_000];
        for (int i = 0; i < x.Length; i++)
            x[i] = stream.NextNormal();
        foreach (var scale in new Func<double[], double>[] { v => RobustScale.Mad(v), v => RobustScale.Sn(v), v => RobustScale.Qn(v), v => RobustScale.Tau(v) })
        {
            Assert.InRange(scale(x), 0.97, 1.03);
            Near(scale(x) * 250, scale(Array.ConvertAll(x, v => 17 - 250 * v)), 1e-9, "unit");
        }
    }

    [Theory]
    [InlineData(2)]
    [InlineData(3)]
    [InlineData(4)]
    [InlineData(5)]
    [InlineData(6)]
    [InlineData(7)]
    [InlineData(8)]
    [InlineData(10)]
    [InlineData(12)]
    public void Small_samples_are_right_on_average(int n)
    {
        double qn = 0, sn = 0;
        var stream = new RandomStream(21, 6, (ulong)n);
        var x = new double[n];
        const int Samples = 20_000;
        for (int k = 0; k < Samples; k++)
        {
            for (int i = 0; i < n; i++)
                x[i] = stream.NextNormal();
            qn += RobustScale.Qn(x) / Samples;
            sn += RobustScale.Sn(x) / Samples;
        }
        // standard error below 0.006 for n = 2, less beyond
        Assert.InRange(qn, 0.975, 1.025);
        Assert.InRange(sn, 0.97, 1.03);
    }

    [Fact]
    public void Degenerate_samples_have_a_defined_scale()
    {
        Assert.True(double.IsNaN(RobustScale.Qn([1])));
        Assert.True(double.IsNaN(RobustScale.Median([])));
        Assert.Equal(0, RobustScale.Mad([4, 4, 4, 9]));
        Assert.Equal(0, RobustScale.Tau([4, 4, 4, 9]));
        Assert.Equal(0, RobustScale.Qn([4, 4, 4, 4]));
    }
}
