using System.Text.Json;
using Gaugeyard.Statistics.Regression;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Regression;

public sealed class LinearReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("04_ols").Where(c => Terms(c.Case) is not null).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Fit_and_diagnostics_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("04_ols").First(x => x.Id == id).Case;
        var v = c.GetProperty("values");
        var (design, y) = Build(c);
        var fit = LinearFit.Of(design.Columns, y);
        Assert.Null(fit.Reason);
        double relative = id.Contains("longley", StringComparison.Ordinal) ? 1e-8 : 1e-10;
        Near(Number(v.GetProperty("rss")), fit.Rss, relative, "rss");
        Near(Number(v.GetProperty("sigma")), fit.S, relative, "s");
        Near(Number(v.GetProperty("r_squared")), fit.R2, relative, "R2");
        Near(Number(v.GetProperty("adj_r_squared")), fit.AdjustedR2, relative, "adjusted R2");
        Near(Number(v.GetProperty("predicted_R2")), fit.PressR2, 1e-8, "PRESS R2");
        Near(Number(v.GetProperty("AIC")), fit.Aic, relative, "AIC");
        Near(Number(v.GetProperty("AICc")), fit.Aicc, relative, "AICc");
        Near(Number(v.GetProperty("BIC")), fit.Bic, relative, "BIC");
        Near(Number(v.GetProperty("F")), fit.F, 1e-8, "F");
        double[] leverage = Numbers(v.GetProperty("leverage")), studentized = Numbers(v.GetProperty("rstudent_external")), cook = Numbers(v.GetProperty("cooks_distance"));
        for (int i = 0; i < y.Length; i++)
        {
            Near(leverage[i], fit.Leverage[i], 1e-8, $"leverage {i}");
            Near(studentized[i], fit.StudentizedResidual(i), 1e-7, $"studentized {i}", 1e-9);
            Near(cook[i], fit.CookDistance(i), 1e-7, $"Cook {i}", 1e-11);
        }
        string[] names = [.. v.GetProperty("coef_names").EnumerateArray().Select(e => e.GetString()!)];
        var coefficients = fit.Coefficients(null);
        // the reference takes the first level as base, so coefficients compare only where there is no category
        if (design.Columns.Any(x => x.Levels.Count > 0) || names.Length != coefficients.Count)
            return;
        double[] b = Numbers(v.GetProperty("coef")), se = Numbers(v.GetProperty("se")), hc3 = Numbers(v.GetProperty("se_HC3"));
        for (int j = 0; j < b.Length; j++)
        {
            Near(b[j], coefficients[j].Estimate, relative, names[j]);
            Near(se[j], coefficients[j].StandardError, relative, "se " + names[j]);
            Near(hc3[j], coefficients[j].Hc3, 1e-7, "HC3 " + names[j]);
        }
    }

    public static TheoryData<string> Nist => [.. ReferenceCases.Of("13_nist").Where(c => c.Case.GetProperty("spec").TryGetProperty("model", out var m) && m.ToString().Contains("degree", StringComparison.Ordinal)).Select(c => c.Id)];

    // NIST Statistical Reference Datasets, linear regression; the certified values are exact rational least squares.
    [Theory]
    [MemberData(nameof(Nist))]
    public void Certified_polynomials_are_met_to_nine_digits(string id)
    {
        var c = ReferenceCases.Of("13_nist").First(x => x.Id == id).Case;
        int degree = int.Parse(c.GetProperty("spec").GetProperty("model").GetString()!.Split("degree ")[1].Split(' ', ',', ')')[0]);
        var data = Data(c.GetProperty("data").GetString()!);
        double[] x = [.. data["x"].Select(Number)], y = [.. data["y"].Select(Number)];
        var all = new DesignData(x.Length);
        all.Numbers["x"] = x;
        var design = Design.Of([.. Enumerable.Range(1, degree).Select(k => new TermSpec($"x^{k}", TermKind.Number, "x") { Power = k })], all);
        var fit = LinearFit.Of(design.Columns, y);
        Assert.Equal(degree, fit.Beta.Length);
        var v = c.GetProperty("values");
        double[] want = Numbers(v.TryGetProperty("coef", out var coef) ? coef : v.GetProperty("coefficients"));
        double[] got = [fit.Intercept, .. fit.Beta];
        for (int k = 0; k <= degree; k++)
            Near(want[k], got[k], 1e-9, $"{id} b{k}", 1e-12);
    }

    // NIST StRD Filip (Filippelli), degree 10: from memory of the published set; its design is the hardest of the collection.
    // The data here are made: y follows a known polynomial on the same range, so that the exact answer is known.
    [Fact]
    public void Tenth_degree_on_a_far_range_is_not_called_singular()
    {
        double[] x = [.. Enumerable.Range(0, 82).Select(i => -3.0 - 5.8 * i / 81)];
        var data = new DesignData(x.Length);
        data.Numbers["x"] = x;
        var design = Design.Of([.. Enumerable.Range(1, 10).Select(k => new TermSpec($"x^{k}", TermKind.Number, "x") { Power = k })], data);
        double[] y = [.. x.Select(v => 1 + v + v * v)];
        var fit = LinearFit.Of(design.Columns, y);
        Assert.Equal(10, fit.Beta.Length);
        Near(1, fit.Beta[0], 1e-3, "slope");
        Near(1, fit.Beta[1], 1e-3, "square");
    }

    [Fact]
    public void Aliased_columns_keep_the_first_and_constant_ones_are_dropped()
    {
        double[] a = [1, 2, 3, 4, 5, 6], b = [2, 1, 4, 3, 6, 5];
        DesignColumn Column(string name, double[] v) => new(0, name, [], v, null);
        var fit = LinearFit.Of([Column("a", a), Column("b", b), Column("sum", [.. a.Zip(b, (x, y) => x + y)]), Column("constant", [7, 7, 7, 7, 7, 7])], [1, 3, 2, 5, 4, 6]);
        Assert.Equal([0, 1], fit.Kept);
    }

    [Fact]
    public void Too_few_records_give_a_reason() =>
        Assert.NotNull(LinearFit.Of([new DesignColumn(0, "a", [], [1], null)], [1]).Reason);

    // Own computation by full n x n matrices (NumPy 1.24): group means of formulas 2c/2d as dummy regression.
    [Fact]
    public void Vehicle_aware_errors_match_the_cluster_formula()
    {
        double[] y = [7.02, 7.05, 6.98, 7.01, 7.41, 7.38, 7.44, 7.20, 7.24];
        int[] vehicles = [0, 0, 0, 0, 1, 1, 1, 2, 2];
        var fit = LinearFit.Of([], y);
        var c = fit.Coefficients(vehicles)[0];
        Assert.Equal(.1382776391, c.Vehicle, 5e-10);
        Assert.Equal(1.842105263, c.VehicleDf, 5e-9);
    }

    // JCGM 100:2008 (GUM) H.3: calibration of a thermometer. y1 -0.1712 (.0029), y2 0.00218 (.00067), s .0035, correction at 30 -0.1494 (.0041).
    [Fact]
    public void Thermometer_of_the_uncertainty_guide()
    {
        double[] t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511];
        double[] b = [-.171, -.169, -.166, -.159, -.164, -.165, -.156, -.157, -.159, -.161, -.160];
        var fit = LinearFit.Of([new DesignColumn(0, "t", [], [.. t.Select(v => v - 20)], null)], b);
        var c = fit.Coefficients(null);
        Assert.Equal((-0.1712, 0.0029, 0.00218, 0.00067), (Math.Round(c[0].Estimate, 4), Math.Round(c[0].StandardError, 4), Math.Round(c[1].Estimate, 5), Math.Round(c[1].StandardError, 5)));
        var at30 = fit.Predict([10]);
        Assert.Equal((-0.1494, 0.0041), (Math.Round(at30.Value, 4), Math.Round(at30.StandardError, 4)));
    }

    private static List<TermSpec>? Terms(JsonElement c)
    {
        string formula = c.GetProperty("spec").GetProperty("formula").GetString()!;
        var factors = c.GetProperty("spec").GetProperty("factors_forced").EnumerateArray().Select(e => e.GetString()!).ToHashSet();
        TermSpec Plain(string name) => new(name, factors.Contains(name) ? TermKind.Category : TermKind.Number, name);
        var terms = new List<TermSpec>();
        foreach (string part in formula.Split('~')[1].Split('+').Select(p => p.Trim()))
        {
            if (part.StartsWith("I(", StringComparison.Ordinal) && part.EndsWith("^2)", StringComparison.Ordinal))
                terms.Add(new TermSpec(part, TermKind.Number, part[2..^3]) { Power = 2 });
            else if (part.Contains(" * ", StringComparison.Ordinal))
            {
                string[] two = part.Split(" * ");
                terms.AddRange([Plain(two[0]), Plain(two[1]), new TermSpec(part, TermKind.Product, null) { Factors = [Plain(two[0]), Plain(two[1])] }]);
            }
            else if (part == "." || part.IndexOfAny(['(', ':', '^']) >= 0)
                return null;
            else
                terms.Add(Plain(part));
        }
        return terms;
    }

    private static (Design, double[]) Build(JsonElement c)
    {
        var data = Data(c.GetProperty("data").GetString()!);
        var terms = Terms(c)!;
        string reading = c.GetProperty("spec").GetProperty("formula").GetString()!.Split('~')[0].Trim();
        string[] variables = [.. terms.SelectMany(t => t.Variables).Distinct()];
        var categories = c.GetProperty("spec").GetProperty("factors_forced").EnumerateArray().Select(e => e.GetString()!).ToHashSet();
        int[] rows = [.. Enumerable.Range(0, data[reading].Length).Where(i => data[reading][i] is not null && variables.All(n => data[n][i] is not null))];
        var all = new DesignData(rows.Length);
        foreach (string name in variables)
        {
            if (categories.Contains(name) || data[name].Any(t => t is not null && !double.TryParse(t, out _)))
            {
                string[] levels = [.. rows.Select(i => data[name][i]!).Distinct().Order(StringComparer.Ordinal)];
                all.Categories[name] = ([.. rows.Select(i => Array.IndexOf(levels, data[name][i]))], levels);
            }
            else
                all.Numbers[name] = [.. rows.Select(i => Number(data[name][i]))];
        }
        terms = [.. terms.Select(Fix)];
        TermSpec Fix(TermSpec t) => t.Kind == TermKind.Product ? t with { Factors = [.. t.Factors.Select(Fix)] } : all.Categories.ContainsKey(t.Variable!) ? t with { Kind = TermKind.Category } : t;
        return (Design.Of(terms, all), [.. rows.Select(i => Number(data[reading][i]))]);
    }
}
