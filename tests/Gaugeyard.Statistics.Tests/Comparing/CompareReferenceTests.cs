using System.Text.Json;
using Gaugeyard.Statistics.Comparing;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Comparing;

public sealed class CompareReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("02_compare").Where(c => c.Id.StartsWith("compare", StringComparison.Ordinal)).Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Tests_and_pairs_agree_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("02_compare").First(x => x.Id == id).Case;
        var data = Data(c.GetProperty("data").GetString()!);
        var spec = c.GetProperty("spec");
        var v = c.GetProperty("values");
        string?[] y = data[spec.GetProperty("response").GetString()!], g = data[spec.GetProperty("group").GetString()!];
        string[] levels = [.. v.GetProperty("levels").EnumerateArray().Select(e => e.ToString())];
        double[][] groups = [.. levels.Select(l => y.Where((t, i) => t is not null && g[i] == l).Select(Number).ToArray())];

        var classical = OneWay.Classical(groups);
        double relative = id.Contains("nist", StringComparison.Ordinal) ? 1e-9 : 1e-10;
        Near(Number(v.GetProperty("anova").GetProperty("F")), classical.Statistic, relative, "F");
        Near(Number(v.GetProperty("anova").GetProperty("p")), classical.P, 1e-9, "p");
        Near(Number(v.GetProperty("kruskal").GetProperty("H_tie_corrected")), OneWay.KruskalWallis(groups).Statistic, 1e-10, "Kruskal-Wallis");
        Near(Number(v.GetProperty("brown_forsythe_levene_median").GetProperty("F")), OneWay.LeveneMedian(groups).Statistic, 1e-9, "spread about the median");
        if (v.TryGetProperty("welch", out var welch) && welch.ValueKind == JsonValueKind.Object)
        {
            var w = OneWay.Welch(groups);
            Near(Number(welch.GetProperty("F")), w.Statistic, relative, "Welch F");
            Near(Number(welch.GetProperty("df2")), w.Df2, relative, "Welch df2");
            Near(Number(welch.GetProperty("p")), w.P, 1e-8, "Welch p");
        }
        Check(v, "tukey_kramer", PairMethod.TukeyKramer, "p_adj");
        Check(v, "games_howell_and_welch_pairs", PairMethod.GamesHowell, "p_games_howell");
        Check(v, "games_howell_and_welch_pairs", PairMethod.HolmWelch, "p_welch_holm");

        void Check(JsonElement values, string table, PairMethod method, string p)
        {
            if (!values.TryGetProperty(table, out var t) || t.ValueKind != JsonValueKind.Object)
                return;
            var pairs = PairComparisons.Of(groups, method, 0.95);
            double[] difference = Numbers(t.GetProperty("diff_b_minus_a")), want = Numbers(t.GetProperty(p));
            for (int i = 0; i < difference.Length; i++)
            {
                string a = Text(t.GetProperty("a"), i), b = Text(t.GetProperty("b"), i);
                var pair = pairs.First(x => (levels[x.A] == a && levels[x.B] == b) || (levels[x.A] == b && levels[x.B] == a));
                double sign = levels[pair.A] == a ? 1 : -1;
                Near(difference[i], sign * pair.Difference, 1e-10, $"{method} {a} {b}");
                // 1e-8 absolute: what a tail of the studentized range is good for in the reference
                Near(want[i], pair.P, 1e-8, $"{method} p {a} {b}", 1e-10);
                if (method != PairMethod.HolmWelch)
                    Near(Numbers(t.GetProperty("lwr95"))[i], sign > 0 ? pair.Low : -pair.High, 1e-8, $"{method} low {a} {b}", 1e-8);
            }
        }
    }

    private static string Text(JsonElement column, int i) => column.ValueKind == JsonValueKind.Array ? column[i].ToString() : column.ToString();

    [Fact]
    public void Studentized_range_agrees_with_the_thirty_digit_integral()
    {
        // a missing df stands for infinitely many
        static double Df(double df) => double.IsNaN(df) ? double.PositiveInfinity : df;
        var t = ReferenceCases.Of("02b_studentized_range").First(c => c.Id == "ptukey_table_open").Case.GetProperty("values");
        double[] q = Numbers(t.GetProperty("q")), k = Numbers(t.GetProperty("k")), df = Numbers(t.GetProperty("df")), tail = Numbers(t.GetProperty("upper_tail"));
        Assert.True(q.Length > 20);
        for (int i = 0; i < q.Length; i++)
            Near(tail[i], StudentizedRange.Upper(q[i], (int)k[i], Df(df[i])), 1e-10, $"q {q[i]} k {k[i]} df {df[i]}", 1e-10);
        t = ReferenceCases.Of("02b_studentized_range").First(c => c.Id == "qtukey_table_open").Case.GetProperty("values");
        double[] p = Numbers(t.GetProperty("p"));
        (q, k, df) = (Numbers(t.GetProperty("q")), Numbers(t.GetProperty("k")), Numbers(t.GetProperty("df")));
        for (int i = 0; i < p.Length; i++)
            Near(q[i], StudentizedRange.Quantile(1 - p[i], (int)k[i], Df(df[i])), 1e-8, $"p {p[i]} k {k[i]} df {df[i]}");
    }

    // Own computation (mpmath 1.2): upper tails where widely used routines fail.
    [Theory]
    [InlineData(3.5, 3, 1, .35987526964)]
    [InlineData(20, 10, 2, .02486615005)]
    [InlineData(4, 100, 1, .78496686625)]
    [InlineData(5.5, 100, 30, .31414305706)]
    public void Studentized_range_holds_at_small_df(double q, int k, double df, double want) =>
        Near(want, StudentizedRange.Upper(q, k, df), 1e-10, "tail", 1e-10);

    [Fact]
    public void Quantile_inverts_the_tail()
    {
        foreach (int k in new[] { 2, 3, 7, 40 })
            foreach (double df in new[] { 1.5, 4, 16, 200, double.PositiveInfinity })
                foreach (double tail in new[] { 0.2, 0.05, 0.001 })
                    Near(tail, StudentizedRange.Upper(StudentizedRange.Quantile(tail, k, df), k, df), 1e-8, $"k {k} df {df} tail {tail}");
    }
}
