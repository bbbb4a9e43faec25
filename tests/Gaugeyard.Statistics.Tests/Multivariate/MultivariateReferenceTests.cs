using Gaugeyard.Statistics.Multivariate;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Multivariate;

public sealed class MultivariateReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("03_manova").Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Statistics_distances_and_tree_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("03_manova").First(x => x.Id == id).Case;
        var data = Data(c.GetProperty("data").GetString()!);
        var v = c.GetProperty("values");
        string[] readings = [.. c.GetProperty("spec").GetProperty("responses").EnumerateArray().Select(e => e.GetString()!)];
        string?[] g = data[c.GetProperty("spec").GetProperty("group").GetString()!];
        string[] levels = [.. v.GetProperty("levels").EnumerateArray().Select(e => e.ToString())];
        int[] rows = [.. Enumerable.Range(0, g.Length).Where(i => g[i] is not null && readings.All(r => data[r][i] is not null))];
        var result = MultivariateComparison.Of([.. rows.Select(i => readings.Select(r => Number(data[r][i])).ToArray())], [.. rows.Select(i => Array.IndexOf(levels, g[i]))], levels.Length);
        Assert.Null(result.Reason);
        var tests = v.GetProperty("tests");
        foreach (var (name, mine) in new[] { ("pillai", result.Pillai!), ("wilks", result.Wilks!), ("hotelling_lawley", result.HotellingLawley!), ("roy", result.Roy!) })
        {
            var t = tests.GetProperty(name);
            Near(Number(t.GetProperty("statistic")), mine.Value, 1e-9, name);
            Near(Number(t.GetProperty("approx_F")), mine.F, 1e-9, name + " F");
            Near(Number(t.GetProperty("df1")), mine.Df1, 1e-12, name + " df1");
            Near(Number(t.GetProperty("df2")), mine.Df2, 1e-12, name + " df2");
            Near(Number(t.GetProperty("p")), mine.P, 1e-7, name + " p", 1e-300);
        }
        var d2 = v.GetProperty("mahalanobis_D2_pooled_within");
        var matrix = new double[levels.Length, levels.Length];
        foreach (var d in result.Distances)
        {
            Near(Number(d2[d.A][d.B]), d.D * d.D, 1e-9, $"D2 {d.A} {d.B}");
            matrix[d.A, d.B] = matrix[d.B, d.A] = d.D;
        }
        double[] heights = Numbers(v.GetProperty("average_linkage_on_D").GetProperty("height"));
        Assert.Equal(heights.Length, AverageLinkage.Of(matrix).Count);
        foreach (var (want, merge) in heights.Zip(AverageLinkage.Of(matrix)))
            Near(want, merge.Height, 1e-9, "height");
        double[] roots = Numbers(v.GetProperty("eigenvalues_of_Einv_H"));
        foreach (var (want, variate) in roots.Zip(result.Canonical))
            Near(want, variate.Eigenvalue, 1e-8, "eigenvalue", 1e-10);
    }

    [Fact]
    public void Readings_that_are_combinations_of_others_get_a_reason()
    {
        double[][] rows = [.. Enumerable.Range(0, 20).Select(i => new[] { i % 7, i % 5, (double)(i % 7 + i % 5) })];
        Assert.NotNull(MultivariateComparison.Of(rows, [.. Enumerable.Range(0, 20).Select(i => i % 2)], 2).Reason);
        Assert.NotNull(MultivariateComparison.Of(rows[..4], [0, 0, 1, 1], 2).Reason);
    }
}
