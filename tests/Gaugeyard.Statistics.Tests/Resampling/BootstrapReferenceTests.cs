using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Resampling;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Resampling;

public sealed class BootstrapReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("08_bootstrap").Where(c => c.Case.GetProperty("spec").TryGetProperty("column", out _)).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Intervals_from_the_saved_index_tables_agree(string id)
    {
        var c = ReferenceCases.Of("08_bootstrap").First(x => x.Id == id).Case;
        var spec = c.GetProperty("spec");
        double[] sample = [.. Data(c.GetProperty("data").GetString()!)[spec.GetProperty("column").GetString()!].Where(t => t is not null).Select(Number)];
        Func<double[], double>? statistic = spec.GetProperty("statistic").GetString() switch { "mean" => v => v.Average(), "median" => v => Quantiles.Median(v), _ => null };
        if (statistic is null)
            return;
        string[] lines = File.ReadAllLines(Path.Combine(AppContext.BaseDirectory, "Reference", "data", spec.GetProperty("index_matrix").GetString()!));
        double[] resampled = [.. lines.Where(l => l.Length > 0).Select(l => statistic([.. l.Split(',').Select(t => sample[int.Parse(t.Trim('"')) - 1])]))];
        double[] jackknife = [.. Enumerable.Range(0, sample.Length).Select(i => statistic([.. sample.Where((_, k) => k != i)]))];
        var v = c.GetProperty("values");
        foreach (double level in new[] { 0.9, 0.95, 0.99 })
        {
            var want = v.GetProperty($"level_{level}");
            var (low, high) = BootstrapIntervals.Percentile(resampled, level);
            Near(Number(want.GetProperty("percentile")[0]), low, 1e-10, $"percentile {level}");
            Near(Number(want.GetProperty("percentile")[1]), high, 1e-10, $"percentile {level}");
            (low, high) = BootstrapIntervals.Bca(resampled, statistic(sample), jackknife, level);
            Near(Number(want.GetProperty("bca")[0]), low, 1e-9, $"bca {level}");
            Near(Number(want.GetProperty("bca")[1]), high, 1e-9, $"bca {level}");
        }
    }
}
