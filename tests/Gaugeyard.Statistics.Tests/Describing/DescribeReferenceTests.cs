using System.Text.Json;
using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Describing;

public sealed class DescribeReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("01_describe").Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Figures_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("01_describe").First(x => x.Id == id).Case;
        var data = Data(c.GetProperty("data").GetString()!);
        string[] by = [.. c.GetProperty("spec").GetProperty("group_by").EnumerateArray().Select(e => e.GetString()!)];
        string?[] values = data[c.GetProperty("spec").GetProperty("column").GetString()!];
        foreach (var group in c.GetProperty("values").EnumerateObject().Where(g => g.Value.ValueKind == JsonValueKind.Object))
        {
            double[] sample = [.. values.Where((v, i) => v is not null && (by.Length == 0 || string.Join("|", by.Select(b => data[b][i])) == group.Name)).Select(Number)];
            var e = group.Value;
            if (sample.Length == 0)
            {
                Assert.Equal(0, e.GetProperty("n").GetInt32());
                continue;
            }
            double Want(string name) => Number(e.GetProperty(name));
            var s = Summary.Of(sample, 0.95);
            Near(Want("n"), s.Count, 0, "n");
            Near(Want("mean"), s.Mean.Mean, 1e-13, "mean");
            Near(Want("sd"), s.StandardDeviation, 1e-12, "sd");
            Near(Want("se"), s.Mean.StandardError, 1e-12, "se");
            Near(Want("median"), s.Median, 1e-13, "median");
            Near(Want("mad_scaled_1.4826"), s.Mad, 1e-13, "mad");
            Near(Want("trimmed_mean_10"), s.TrimmedMean, 1e-13, "trimmed mean");
            Near(Want("geometric_mean"), s.GeometricMean, 1e-13, "geometric mean");
            Near(Want("harmonic_mean"), s.HarmonicMean, 1e-13, "harmonic mean");
            Near(Want("skew_G1"), s.Skewness, 1e-10, "skewness", 1e-12);
            Near(Want("exkurt_G2"), s.ExcessKurtosis, 1e-10, "kurtosis", 1e-11);
            if (e.GetProperty("ci95").ValueKind == JsonValueKind.Array && sample.Length > 1)
            {
                Near(Number(e.GetProperty("ci95")[0]), s.Mean.Low, 1e-12, "low");
                Near(Number(e.GetProperty("ci95")[1]), s.Mean.High, 1e-12, "high");
            }
            double[] sorted = [.. sample.Order()];
            double[] probabilities = Numbers(e.GetProperty("q_probs"));
            foreach (var type in Enum.GetValues<QuantileType>())
                for (int i = 0; i < probabilities.Length; i++)
                    Near(Number(e.GetProperty($"q_type{(int)type}")[i]), Quantiles.OfSorted(sorted, probabilities[i], type), 1e-13, $"{group.Name} quantile {probabilities[i]} type {type}");
        }
    }

    public static TheoryData<string> Components => [.. ReferenceCases.Of("11_variance_components").Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Components))]
    public void Variance_components_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("11_variance_components").First(x => x.Id == id).Case;
        var data = Data(c.GetProperty("data").GetString()!);
        var spec = c.GetProperty("spec");
        string?[] y = data[spec.GetProperty("response").GetString()!], g = data[spec.GetProperty("group").GetString()!];
        int[] rows = [.. Enumerable.Range(0, y.Length).Where(i => y[i] is not null && g[i] is not null)];
        string[] levels = [.. rows.Select(i => g[i]!).Distinct()];
        double[] values = [.. rows.Select(i => Number(y[i]))];
        int[] codes = [.. rows.Select(i => Array.IndexOf(levels, g[i]))];
        var reml = c.GetProperty("values").GetProperty("reml");
        var split = VarianceComponents.Of(values, codes)!;
        Near(Number(reml.GetProperty("within_var")), split.Within, 1e-6, "within");
        Near(Number(reml.GetProperty("between_var")), split.Between, 2e-6, "between", 1e-6 * split.Within);
        int[] sizes = [.. codes.GroupBy(k => k).Select(k => k.Count())];
        if (sizes.Distinct().Count() > 1)
            return;
        var mean = VehicleMean.OfRuns(values, codes, 0.95);
        var want = c.GetProperty("values").GetProperty("mean_inference");
        Near(Number(want.GetProperty("cluster_CR1_se")), mean.StandardError, 1e-11, "se");
        Near(Number(want.GetProperty("cluster_df")), mean.Df, 1e-11, "df");
        Near(Number(want.GetProperty("ci95_cluster")[0]), mean.Low, 1e-11, "low");
    }
}
