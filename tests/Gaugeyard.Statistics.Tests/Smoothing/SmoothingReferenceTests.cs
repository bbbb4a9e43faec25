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
            string kind = v.GetProperty("kind").GetString()!;
            bool optimum = kind.EndsWith("optimum", StringComparison.Ordinal);
            var fit = kind.StartsWith("fixed_df", StringComparison.Ordinal) ? problem.FitDf(Number(v.GetProperty("df")))
                : optimum ? problem.Choose(kind == "gcv_optimum" ? SplineCriterion.Gcv : SplineCriterion.LeaveOneOut)
                : problem.FitInUnits(Number(v.GetProperty("lambda_")));
            if (optimum)
            {
                // with tied x the score can fall again towards interpolation, at a stiffness outside the range that is searched here
                if (Number(v.GetProperty("lambda_")) / Math.Pow(x.Max() - x.Min(), 3) < 0.01 / (Math.Pow(Math.PI, 4) * Math.Pow(x.Length, 3)))
                    continue;
                bool gcv = kind == "gcv_optimum";
                Near(Number(v.GetProperty("df")), fit.Df, 1e-4, $"{id} {kind} df");
                Near(Number(v.GetProperty(gcv ? "gcv" : "loo_cv_mse")), gcv ? fit.Gcv : fit.LeaveOneOut(), 1e-7, $"{id} {kind} score");
                continue;
            }
            Near(Number(v.GetProperty("df")), fit.Df, 1e-8, $"{id} {kind} df");
            double[] at = Numbers(v.GetProperty("points")), want = Numbers(v.GetProperty("fitted_at_points"));
            for (int g = 0; g < at.Length; g++)
                Near(want[g], fit.Evaluate(at[g]), 1e-7, $"df {v.GetProperty("df")} at {at[g]}", 1e-8);
            Near(Number(v.GetProperty("lambda_")), fit.LambdaInUnits, 1e-6, "lambda");
            Near(Number(v.GetProperty("rss")), fit.Rss, 1e-7, "rss");
            Near(Number(v.GetProperty("gcv")), fit.Gcv, 1e-7, "gcv");
            Near(Number(v.GetProperty("loo_cv_mse")), fit.LeaveOneOut(), 1e-7, "leave-one-out");
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

    [Theory]
    [InlineData(0, 0.4, false)]
    [InlineData(1, 0.15, true)]
    [InlineData(2, 0.6, true)]
    [InlineData(2, 1.7, false)]
    public void Windows_by_power_sums_agree_with_orthogonal_decomposition(int degree, double span, bool weighted)
    {
        var random = new Random(5);
        const int N = 120;
        // ties and a gap, far from zero
        double[] x = [.. Enumerable.Range(0, N).Select(i => 5000 + (i % 3 == 0 ? Math.Round(random.NextDouble() * 10) : random.NextDouble() * 10 + (i % 2) * 20))], y = [.. x.Select(v => 1e4 + Math.Sin(v) + random.NextDouble())];
        double[]? w = weighted ? [.. x.Select(_ => 0.5 + random.NextDouble())] : null;
        var fit = LocalRegression.Of([x], y, new LocalRegressionOptions { Degree = degree, Span = span }, w).Fit!;
        int q = fit.Neighbours;
        for (double at = 5000; at < 5030; at += 1.3)
        {
            double[] distance = [.. x.Select(v => Math.Abs(v - at))];
            double h = distance.Order().ElementAt(q - 1) * Math.Max(1, span);
            int[] rows = [.. Enumerable.Range(0, N).Where(i => distance[i] < h)];
            double[] weights = [.. rows.Select(i => Math.Pow(1 - Math.Pow(distance[i] / h, 3), 3) * (w?[i] ?? 1))];
            double[] l = LocalSolve.Row([[.. rows.Select(i => x[i] - at)]], weights, degree)!;
            Near(rows.Select((i, k) => l[k] * (y[i] - 1e4)).Sum(), fit.Evaluate([at]) - 1e4, 1e-8, $"at {at}", 1e-9);
            double[] row = fit.OperatorRow([at])!;
            for (int k = 0; k < rows.Length; k++)
                Assert.Equal(l[k], row[rows[k]], 1e-9);
        }
    }

    [Fact]
    public void Residual_moments_by_random_signs_agree_with_the_exact_ones()
    {
        var random = new Random(6);
        double[] x = [.. Enumerable.Range(0, 1600).Select(_ => random.NextDouble())], y = [.. x.Select(v => v + random.NextDouble())];
        var part = Enumerable.Range(0, 1400).ToArray();
        var s = LocalRegression.Of([x], y, new LocalRegressionOptions { Span = 0.3 }).Fit!.Statistics();
        var exact = LocalRegression.Of([[.. part.Select(i => x[i])]], [.. part.Select(i => y[i])], new LocalRegressionOptions { Span = 0.3 }).Fit!.Statistics();
        // what the fit takes from the degrees of freedom hardly depends on n
        Assert.Equal(1400 - exact.Delta2, 1600 - s.Delta2, 1.0);
        Assert.Equal(1400 - exact.Delta1, 1600 - s.Delta1, 0.2);
    }

    [Fact]
    public void Leaving_out_is_a_refit_without_the_record_whatever_the_order_of_the_rows()
    {
        var random = new Random(9);
        double[] x = [.. Enumerable.Range(0, 60).Select(_ => Math.Round(random.NextDouble() * 20))], y = [.. x.Select(v => v * v + random.NextDouble())];
        var options = new LocalRegressionOptions { Span = 0.45 };
        double[] left = LocalRegression.Of([x], y, options).Fit!.LeaveOneOut();
        for (int i = 0; i < 60; i += 7)
        {
            int k = i;
            var rest = LocalRegression.Of([[.. x.Where((_, j) => j != k)]], [.. y.Where((_, j) => j != k)], options).Fit!;
            Near(rest.Evaluate([x[i]]), left[i], 1e-10, $"record {i}");
        }
        int[] order = [.. Enumerable.Range(0, 60).Reverse()];
        double[] turned = LocalRegression.Of([[.. order.Select(i => x[i])]], [.. order.Select(i => y[i])], options).Fit!.LeaveOneOut();
        for (int i = 0; i < 60; i++)
            Near(left[i], turned[59 - i], 1e-10, "turned");
    }

    [Fact]
    public void A_resample_is_a_refit_with_the_records_repeated()
    {
        var random = new Random(3);
        double[] x = [.. Enumerable.Range(0, 80).Select(_ => random.NextDouble() * 5)], y = [.. x.Select(v => Math.Cos(v) + random.NextDouble())];
        var options = new LocalRegressionOptions { Span = 0.5 };
        int[] units = [.. Enumerable.Range(0, 80).Select(i => i / 4)], counts = Gaugeyard.Statistics.Resampling.ResampleCounts.Of(units, 20, 11, 3);
        double[] at = [0.3, 1.1, 2.5, 4.4];
        double[] curve = LocalBootstrap.Curves(x, y, null, at, options, _ => counts, 1)[0];
        int[] rows = [.. Enumerable.Range(0, 80).SelectMany(i => Enumerable.Repeat(i, counts[i]))];
        var refit = LocalRegression.Of([[.. rows.Select(i => x[i])]], [.. rows.Select(i => y[i])], options).Fit!;
        for (int g = 0; g < at.Length; g++)
            Near(refit.Evaluate([at[g]]), curve[g], 1e-10, $"at {at[g]}");
    }

    [Fact]
    public void A_long_record_is_thinned_only_for_its_summary_figures()
    {
        var random = new Random(4);
        double[] x = [.. Enumerable.Range(0, 41_000).Select(_ => random.NextDouble())], y = [.. x.Select(v => Math.Sin(6 * v) + 0.3 * (random.NextDouble() - 0.5))];
        var fit = LocalRegression.Of([x], y, new LocalRegressionOptions { Span = 0.1 }).Fit!;
        var s = fit.Statistics();
        Assert.Equal(0.3 / Math.Sqrt(12), s.S, 2e-3);
        Assert.Equal(fit.Evaluate([x[123]]), s.Fitted[123], 1e-3);
        Assert.InRange(s.Trace, 15, 60);
    }

    [Fact]
    public void Work_can_be_stopped()
    {
        using var stop = new CancellationTokenSource();
        stop.Cancel();
        double[] x = [.. Enumerable.Range(0, 100).Select(i => (double)i)];
        var fit = LocalRegression.Of([x], x, new LocalRegressionOptions()).Fit!;
        Assert.ThrowsAny<OperationCanceledException>(() => fit.Statistics(cancel: stop.Token));
        Assert.ThrowsAny<OperationCanceledException>(() => LocalBootstrap.Curves(x, x, null, [1.0], fit.Options, _ => [.. Enumerable.Repeat(1, 100)], 10, null, stop.Token));
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
