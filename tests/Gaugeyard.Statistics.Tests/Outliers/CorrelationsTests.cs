using Gaugeyard.Statistics.Outliers;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class CorrelationsTests
{
    // Longley (1967), J. Am. Stat. Assoc. 62:819-841: a table whose linear correlations reach 0.995
    [Fact]
    public void Pairs_use_the_records_that_know_both()
    {
        double[] a = [1, 2, 3, 4, 5, double.NaN, 7], b = [2, 1, 4, 3, double.NaN, 9, 5];
        var linear = Correlations.Pearson([a, b]);
        var rank = Correlations.Spearman([a, b]);

        Assert.Equal(5, linear.N[0, 1]);
        Assert.Equal(6, linear.N[0, 0]);
        // by hand over (1,2) (2,1) (3,4) (4,3) (7,5): sums of products 12, squares 21.2 and 10
        Near(12 / Math.Sqrt(21.2 * 10), linear.R[0, 1], 1e-14, "linear");
        // ranks 1 2 3 4 5 and 2 1 4 3 5: 1 - 6*4/(5*24)
        Near(0.8, rank.R[1, 0], 1e-14, "rank");
    }

    [Fact]
    public void Rank_correlation_is_the_linear_one_of_ranks_with_ties()
    {
        var data = Data("mtcars.csv");
        double[] mpg = Array.ConvertAll(data["mpg"], Number), cyl = Array.ConvertAll(data["cyl"], Number), wt = Array.ConvertAll(data["wt"], Number);
        var rank = Correlations.Spearman([mpg, cyl, wt]);
        double[] rm = Gaugeyard.Statistics.Comparing.Ranks.Of(mpg).Ranks, rc = Gaugeyard.Statistics.Comparing.Ranks.Of(cyl).Ranks;
        Near(Correlations.Of(rm, rc), rank.R[0, 1], 1e-13, "mpg cyl");
        // any rising map of a reading leaves it
        var bent = Correlations.Spearman([Array.ConvertAll(mpg, Math.Log), cyl, Array.ConvertAll(wt, v => v * v * v)]);
        for (int i = 0; i < 3; i++)
            for (int j = 0; j < 3; j++)
                Near(rank.R[i, j], bent.R[i, j], 1e-13, $"{i} {j}");
    }

    [Fact]
    public void A_large_offset_loses_nothing_and_a_constant_is_nothing()
    {
        double[] x = [.. Enumerable.Range(0, 1000).Select(i => Math.Sin(i))], y = [.. Enumerable.Range(0, 1000).Select(i => Math.Sin(i) + 0.3 * Math.Cos(7 * i))];
        double r = Correlations.Of(x, y);
        Near(r, Correlations.Of(Array.ConvertAll(x, v => v + 1e6), Array.ConvertAll(y, v => v - 1e6)), 1e-8, "shifted");
        Assert.True(double.IsNaN(Correlations.Pearson([x, new double[1000]]).R[0, 1]));
        Assert.True(double.IsNaN(Correlations.Spearman([x, Array.ConvertAll(x, _ => 0.1)]).R[0, 1]));
        Assert.True(double.IsNaN(Correlations.Pearson([[1, double.NaN], [1, 2]]).R[0, 1]));
        Assert.Throws<ArgumentException>(() => Correlations.Spearman([[1, 2], [1]]));
    }

    [Fact]
    public void Published_longley_correlation()
    {
        var data = Data("longley.csv");
        double[] gnp = Array.ConvertAll(data["GNP"], Number), year = Array.ConvertAll(data["Year"], Number);
        // by own computation in exact rational arithmetic on the printed table
        Near(0.995273484, Correlations.Of(gnp, year), 1e-8, "GNP against year");
    }
}
