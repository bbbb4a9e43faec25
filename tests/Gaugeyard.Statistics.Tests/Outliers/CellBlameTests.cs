using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class CellBlameTests
{
    private static readonly double[] Center = [10, 20, 30];
    private static readonly double[,] Covariance = { { 1, 0.8, 0 }, { 0.8, 1, 0 }, { 0, 0, 4 } };
    private static readonly double[] Within = [0, 5, 7.4];

    [Fact]
    public void One_wild_cell_is_found_with_what_the_others_make_likely()
    {
        var cell = Assert.Single(CellBlame.Of([11, 26, 30], Center, Covariance, Within));
        // by hand: 20 + 0.8 (11 - 10) = 20.8, sd sqrt(1 - 0.64) = 0.6
        Assert.Equal(1, cell.Reading);
        Near(20.8, cell.Expected, 1e-12, "expected");
        Near(5.2 / 0.6, cell.Shift, 1e-12, "shift");
    }

    [Fact]
    public void Two_wild_cells_are_found_worst_first()
    {
        var cells = CellBlame.Of([10.2, 29, 70], Center, Covariance, Within);
        Assert.Equal([2, 1], cells.Select(c => c.Reading));
    }

    [Fact]
    public void A_record_against_the_trend_blames_one_of_the_pair()
    {
        // neither cell is far from its own center, together they contradict the correlation
        var cell = Assert.Single(CellBlame.Of([11.9, 18.4, 30], Center, Covariance, Within));
        Assert.InRange(cell.Reading, 0, 1);
    }

    [Fact]
    public void A_singular_covariance_is_a_mistake() =>
        Assert.Throws<ArgumentException>(() => CellBlame.Of([1, 2], [0, 0], new double[,] { { 1, 1 }, { 1, 1 } }, [0, 5]));
}
