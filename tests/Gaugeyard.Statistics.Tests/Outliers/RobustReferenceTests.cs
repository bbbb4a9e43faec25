using Gaugeyard.Statistics.Outliers;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

/// <summary>Robust covariance and scales against reference figures computed with an independent library (see the file's software field).</summary>
public sealed class RobustReferenceTests
{
    [Theory]
    [InlineData("mcd_hbk_3")]
    [InlineData("mcd_hbk_4")]
    [InlineData("mcd_mtcars_3")]
    [InlineData("mcd_iris_4")]
    public void Minimum_covariance_determinant_agrees(string id)
    {
        var (_, c) = Of("09_robust").Single(x => x.Id == id);
        var v = c.GetProperty("values");
        var data = Data(c.GetProperty("data").GetString()!);
        double[][] readings = [.. c.GetProperty("spec").GetProperty("columns").EnumerateArray().Select(n => Array.ConvertAll(data[n.GetString()!], Number))];
        int p = readings.Length;

        var r = MinimumCovarianceDeterminant.Estimate(readings);

        Assert.Equal(McdStatus.Found, r.Status);
        Assert.Equal(v.GetProperty("h").GetInt32(), r.H);
        double logDeterminant = Number(v.GetProperty("log_det_unscaled_cov_of_subset"));
        Assert.True(r.LogDeterminant <= logDeterminant + 1e-9, $"{r.LogDeterminant:R} is worse than {logDeterminant:R}");
        Near(Number(v.GetProperty("raw_consistency_and_small_sample_factor")[0]), r.RawConsistency, 1e-12, "consistency");
        Near(Number(v.GetProperty("raw_consistency_and_small_sample_factor")[1]), r.RawSmallSample, 1e-12, "small sample");
        if (!r.Subset.Select(i => i + 1).SequenceEqual(v.GetProperty("best_h_subset").EnumerateArray().Select(x => x.GetInt32())))
        {
            // a smaller determinant is a better answer; only then may the subset differ
            Assert.True(r.LogDeterminant < logDeterminant - 1e-9);
            return;
        }
        Near(Number(v.GetProperty("reweighted_factor")[0]), r.Consistency, 1e-11, "reweighted consistency");
        Near(Number(v.GetProperty("reweighted_factor")[1]), r.SmallSample, 1e-12, "reweighted small sample");
        for (int j = 0; j < p; j++)
        {
            Near(Number(v.GetProperty("raw_center")[j]), r.RawCenter[j], 1e-12, "raw center");
            Near(Number(v.GetProperty("reweighted_center")[j]), r.Center[j], 1e-12, "center");
            for (int k = 0; k < p; k++)
            {
                Near(Number(v.GetProperty("subset_cov_unscaled_nminus1")[j][k]), r.SubsetCovariance[j, k], 1e-10, "subset covariance", 1e-14);
                Near(Number(v.GetProperty("reweighted_cov")[j][k]), r.Covariance[j, k], 1e-10, "covariance", 1e-13);
            }
        }
        double[] raw = Numbers(v.GetProperty("raw_mah_sq")), next = Numbers(v.GetProperty("reweighted_mah_sq"));
        for (int i = 0; i < r.N; i++)
        {
            Near(raw[i], r.RawDistances[i], 1e-10, $"raw distance {i}");
            Near(next[i], r.Distances[i], 1e-10, $"distance {i}");
        }
        double cut = Number(v.GetProperty("flag_cut_chisq_975"));
        Assert.Equal(v.GetProperty("flagged_rows").EnumerateArray().Select(x => x.GetInt32()), Enumerable.Range(1, r.N).Where(i => r.Distances[i - 1] > cut));
    }

    [Fact]
    public void Scales_agree()
    {
        int compared = 0;
        foreach (var (id, c) in Of("09_robust").Where(x => x.Id.StartsWith("robust_univariate", StringComparison.Ordinal)))
        {
            var data = Data(c.GetProperty("data").GetString()!);
            var spec = c.GetProperty("spec");
            double[] column = Array.ConvertAll(data[spec.GetProperty("column").GetString()!], Number);
            string? by = spec.GetProperty("group_by").GetString();
            foreach (var g in c.GetProperty("values").EnumerateObject())
            {
                double[] x = [.. column.Where((v, i) => !double.IsNaN(v) && (by is null || data[by][i] == g.Name))];
                string what = $"{id} {g.Name}";
                Near(Number(g.Value.GetProperty("median")), RobustScale.Median(x), 1e-14, what);
                Near(Number(g.Value.GetProperty("mad_scaled")), RobustScale.Mad(x), 1e-12, what);
                // the library holds the chosen difference in single precision: 0.9 appears as 0.89999998 in the prices of small cars
                Near(Number(g.Value.GetProperty("Qn")), RobustScale.Qn(x), 6e-8, what + " Qn");
                Near(Number(g.Value.GetProperty("Qn_no_finite_corr")), RobustScale.Qn(x, corrected: false), 6e-8, what + " Qn");
                Near(Number(g.Value.GetProperty("Sn")), RobustScale.Sn(x), 1e-9, what + " Sn");
                Near(Number(g.Value.GetProperty("Sn_no_finite_corr")), RobustScale.Sn(x, corrected: false), 1e-9, what + " Sn");
                compared++;
            }
        }
        Assert.True(compared > 8, $"only {compared} groups were compared");
    }
}
