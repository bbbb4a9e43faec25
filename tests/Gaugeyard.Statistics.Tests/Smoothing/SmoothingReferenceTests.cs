using System.Text.Json;
using Gaugeyard.Statistics.Smoothing;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Smoothing;

public sealed class SmoothingReferenceTests
{
    public static TheoryData<string> Fits => [.. ReferenceCases.Of("06_local_regression").Where(c => c.Id.StartsWith("loess_", StringComparison.Ordinal)).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Fits))]
    public void Direct_fits_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("06_local_regression").First(x => x.Id == id).Case;
        var spec = c.GetProperty("spec");
        var (x, y) = Data(c, spec);
        double[][] at = [.. spec.GetProperty("points").EnumerateObject().OrderBy(p => p.Name, StringComparer.Ordinal).Select(p => Numbers(p.Value))];
        int compared = 0;
        foreach (var v in c.GetProperty("values").EnumerateArray())
        {
            // fits the reference itself warns about hinge on its treatment of singular neighbourhoods
            if (v.GetProperty("surface").GetString() != "direct" || v.GetProperty("warnings").GetArrayLength() > 0)
                continue;
            bool robust = v.GetProperty("family").GetString() == "symmetric";
            double span = Number(v.GetProperty("span"));
            var (fit, reason) = LocalRegression.Of(x, y, new LocalRegressionOptions { Degree = spec.GetProperty("degree").GetInt32(), Span = span, Robust = robust });
            Assert.Null(reason);
            double[] want = Numbers(v.GetProperty("fitted_at_points")), errors = Numbers(v.GetProperty("se_at_points"));
            var s = fit!.Statistics();
            Near(Number(v.GetProperty("trace_hat")), s.Trace, 1e-8, $"trace {span} {robust}");
            Near(Number(v.GetProperty("one_delta")), s.Delta1, 1e-7, "delta1");
            Near(Number(v.GetProperty("two_delta")), s.Delta2, 1e-7, "delta2");
            Near(Number(v.GetProperty("residual_scale_s")), s.S, robust ? 1e-5 : 1e-8, $"s {span} {robust}");
            for (int g = 0; g < want.Length; g++)
            {
                double[] point = [.. at.Select(a => a[g])];
                Near(want[g], fit.Evaluate(point), robust ? 1e-6 : 1e-8, $"span {span} {(robust ? "robust" : "plain")} at {string.Join(',', point)}", 1e-9);
                if (!robust)
                    Near(errors[g], s.S * Math.Sqrt(fit.OperatorRow(point)!.Sum(l => l * l)), 1e-7, "se", 1e-9);
            }
            compared++;
        }
        Assert.True(compared > 0 || c.GetProperty("values").EnumerateArray().All(v => v.GetProperty("warnings").GetArrayLength() > 0 || v.GetProperty("surface").GetString() != "direct"));
    }

    public static TheoryData<string> Scores => [.. ReferenceCases.Of("06_local_regression").Where(c => c.Id.StartsWith("loesscv_", StringComparison.Ordinal)).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Scores))]
    public void Scores_of_stiffness_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("06_local_regression").First(x => x.Id == id).Case;
        var (x, y) = Data(c, c.GetProperty("spec"));
        foreach (var v in c.GetProperty("values").EnumerateArray().Where(v => v.GetProperty("warnings").GetArrayLength() == 0))
        {
            var fit = LocalRegression.Of(x, y, new LocalRegressionOptions { Degree = v.GetProperty("degree").GetInt32(), Span = Number(v.GetProperty("span")) }).Fit!;
            double[] left = fit.LeaveOneOut();
            string what = $"degree {v.GetProperty("degree")} span {v.GetProperty("span")}";
            Near(Number(v.GetProperty("loo_refit_mse")), left.Select((l, i) => (y[i] - l) * (y[i] - l)).Average(), 1e-8, "leave-one-out " + what);
            var s = fit.Statistics(moments: false);
            Near(Number(v.GetProperty("gcv")), s.Gcv, 1e-8, "gcv " + what);
            Near(Number(v.GetProperty("aicc_hurvich")), s.Aicc, 1e-8, "aicc " + what);
        }
    }

    public static TheoryData<string> Splines => [.. ReferenceCases.Of("07_splines").Where(c => c.Id.StartsWith("smoothspline", StringComparison.Ordinal)).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Splines))]
    public void Smoothing_splines_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("07_splines").First(x => x.Id == id).Case;
        var spec = c.GetProperty("spec");
        var data = ReferenceCases.Data(c.GetProperty("data").GetString()!);
        string xn = spec.GetProperty("predictor").GetString()!, yn = spec.GetProperty("response").GetString()!;
        int[] rows = [.. Enumerable.Range(0, data[xn].Length).Where(i => data[xn][i] is not null && data[yn][i] is not null)];
        double[] x = [.. rows.Select(i => Number(data[xn][i]))], y = [.. rows.Select(i => Number(data[yn][i]))];
        var problem = SmoothingSpline.Of(x, y).Problem!;
        foreach (var v in c.GetProperty("values").EnumerateArray())
        {
            if (!v.GetProperty("kind").GetString()!.StartsWith("fixed_df", StringComparison.Ordinal))
                continue;
            var fit = problem.FitDf(Number(v.GetProperty("df")));
            double[] at = Numbers(v.GetProperty("points")), want = Numbers(v.GetProperty("fitted_at_points"));
            for (int g = 0; g < at.Length; g++)
                Near(want[g], fit.Evaluate(at[g]), 1e-7, $"df {v.GetProperty("df")} at {at[g]}", 1e-8);
            Near(Number(v.GetProperty("lambda_")), fit.LambdaInUnits, 1e-6, "lambda");
            Near(Number(v.GetProperty("rss")), fit.Rss, 1e-7, "rss");
            Near(Number(v.GetProperty("gcv")), fit.Gcv, 1e-7, "gcv");
            Near(Number(v.GetProperty("loo_cv_mse")), fit.LeaveOneOut(x, y), 1e-7, "leave-one-out");
        }
    }

    [Fact]
    public void Interpolants_agree_with_the_reference()
    {
        foreach (var (id, c) in ReferenceCases.Of("07_splines").Where(x => x.Id.StartsWith("interpolants", StringComparison.Ordinal)))
        {
            var v = c.GetProperty("values");
            double[] x = Numbers(v.GetProperty("knots_x")), y = Numbers(v.GetProperty("knots_y")), at = Numbers(v.GetProperty("points"));
            foreach (var (kind, name) in new[] { (InterpolantKind.NaturalCubic, "natural_cubic"), (InterpolantKind.MonotoneCubic, "monoH_fc"), (InterpolantKind.Akima, "akima") })
            {
                // the reference does not flatten the shape-preserving curve at turning points, as its publication asks
                if (kind == InterpolantKind.MonotoneCubic && !y.SequenceEqual(y.Order()))
                    continue;
                var curve = Interpolants.Of(x, y, kind).Curve!;
                double[] want = Numbers(v.GetProperty(name));
                for (int g = 0; g < at.Length; g++)
                    Near(want[g], curve.Evaluate(at[g]), 1e-9, $"{id} {name} at {at[g]}", 1e-11 * y.Max(Math.Abs));
            }
        }
    }

    // NIST/SEMATECH e-Handbook, section 4.1.4.4, "Example of LOESS computations": 21 points, local straight lines over 7 of them.
    [Fact]
    public void Twenty_one_points_of_the_handbook()
    {
        double[] x = [0.5578196, 2.0217271, 2.5773252, 3.4140288, 4.3014084, 4.7448394, 5.1073781, 6.5411662, 6.7216176, 7.2600583, 8.1335874, 9.1224379, 11.9296663, 12.3797674, 13.2728619, 14.2767453, 15.3731026, 15.6476637, 18.5605355, 18.5866354, 18.7572812];
        double[] y = [18.63654, 103.49646, 150.35391, 190.51031, 208.70115, 213.71135, 228.49353, 233.55387, 234.55054, 223.89225, 227.68339, 223.91982, 168.01999, 164.95750, 152.61107, 160.78742, 168.55567, 152.42658, 221.70702, 222.69040, 243.18828];
        double[] want = [20.59302, 107.16031, 139.76738, 174.26304, 207.23338, 216.66159, 220.54448, 229.86069, 229.83471, 229.43012, 226.60446, 220.39041, 172.34800, 163.84166, 161.84897, 160.33508, 160.19199, 161.05559, 227.33996, 227.89853, 231.55856];
        var fit = LocalRegression.Of([x], y, new LocalRegressionOptions { Degree = 1, Span = 7.0 / 21 }).Fit!;
        double[] got = fit.FittedValues();
        for (int i = 0; i < 21; i++)
            Assert.Equal(want[i], got[i], 6e-6);
    }

    [Fact]
    public void Data_that_cannot_carry_a_fit_get_a_reason()
    {
        Assert.NotNull(LocalRegression.Of([[1, 1, 1]], [1, 2, 3], new LocalRegressionOptions()).Reason);
        Assert.NotNull(LocalRegression.Of([[1, 2, 3]], [1, 2, 3], new LocalRegressionOptions { Span = 0.3 }).Reason);
        Assert.NotNull(SmoothingSpline.Of([1, 1, 2], [1, 2, 3]).Reason);
        Assert.NotNull(Interpolants.Of([1], [1], InterpolantKind.Akima).Reason);
        Assert.All(LocalRegression.Of([[1, 2, 3, 4, 5, 6]], [7, 7, 7, 7, 7, 7], new LocalRegressionOptions { Span = 1 }).Fit!.FittedValues(), v => Assert.Equal(7, v, 1e-12));
    }

    [Fact]
    public void A_resample_of_everything_once_is_the_fit_itself_and_repeats_bit_for_bit()
    {
        var random = new Random(2);
        double[] x = [.. Enumerable.Range(0, 200).Select(_ => random.NextDouble() * 40 - 10)], y = [.. x.Select(v => 8 + 0.01 * v * v + random.NextDouble())];
        double[] at = [-8, 0, 12, 25];
        var options = new LocalRegressionOptions { Span = 0.4 };
        var fit = LocalRegression.Of([x], y, options).Fit!;
        var once = LocalBootstrap.Curves(x, y, null, at, options, _ => [.. Enumerable.Repeat(1, 200)], 1)[0];
        for (int g = 0; g < at.Length; g++)
            Near(fit.Evaluate([at[g]]), once[g], 1e-11, $"at {at[g]}");
        int[] units = [.. Enumerable.Range(0, 200).Select(i => i / 5)];
        var a = LocalBootstrap.Curves(x, y, null, at, options, b => Gaugeyard.Statistics.Resampling.ResampleCounts.Of(units, 40, 7, b), 50);
        var again = LocalBootstrap.Curves(x, y, null, at, options, b => Gaugeyard.Statistics.Resampling.ResampleCounts.Of(units, 40, 7, b), 50);
        for (int b = 0; b < 50; b++)
            Assert.Equal(a[b], again[b]);
    }

    private static (double[][], double[]) Data(JsonElement c, JsonElement spec)
    {
        var data = ReferenceCases.Data(c.GetProperty("data").GetString()!);
        string[] predictors = [.. spec.GetProperty("predictors").EnumerateArray().Select(e => e.GetString()!)];
        string response = spec.GetProperty("response").GetString()!;
        int[] rows = [.. Enumerable.Range(0, data[response].Length).Where(i => data[response][i] is not null && predictors.All(p => data[p][i] is not null))];
        return ([.. predictors.Select(p => rows.Select(i => Number(data[p][i])).ToArray())], [.. rows.Select(i => Number(data[response][i]))]);
    }
}
