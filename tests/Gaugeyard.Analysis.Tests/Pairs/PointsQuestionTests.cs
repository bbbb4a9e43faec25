using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Analysis.Tests.Pairs;

public sealed class PointsQuestionTests
{
    private static readonly RevisionContent Content = RevisionContent.InMemory(
        [
            new NumberColumn(new ColumnDefinition("A", ColumnKind.Number), [1, double.NaN, 3, 4]),
            new NumberColumn(new ColumnDefinition("B", ColumnKind.Number), [10, 20, 30, 40]),
            CodedColumn.FromTexts(new ColumnDefinition("Kind", ColumnKind.Category), ["y", null, "x", "y"]),
        ],
        marks: new Dictionary<string, IReadOnlyDictionary<int, CellMark>> { ["B"] = new Dictionary<int, CellMark> { [3] = new(CellState.Filled) { Low = 29, High = 31 } } },
        setAside: new Dictionary<int, string> { [4] = "wrong route" });

    [Fact]
    public void Set_aside_records_stay_out_and_missing_ones_stay_in()
    {
        var points = new PointsQuestion { Readings = ["A", "B"], Colour = "Kind" }.Collect(Content);
        Assert.Equal([1, 2, 3], points.Records);
        Assert.Equal([1, double.NaN, 3], points.Values[0]);
        Assert.Equal([10, 20, double.NaN], points.Values[1]);
        Assert.Null(points.Filled);
        Assert.Equal(["x", "y"], points.Levels);
        Assert.Equal([1, ushort.MaxValue, 0], points.Colours);
    }

    [Fact]
    public void Estimates_are_told_apart_when_they_take_part()
    {
        var points = new PointsQuestion { Readings = ["A", "B"], WithFilled = true }.Collect(Content);
        Assert.Equal(30, points.Values[1][2]);
        Assert.Equal([0, 0, 0b10], points.Filled);
        Assert.Null(points.Colours);
    }

    [Fact]
    public void A_wrong_column_is_told()
    {
        Assert.Throws<QuestionException>(() => new PointsQuestion { Readings = ["Kind"] }.Collect(Content));
        Assert.Throws<QuestionException>(() => new PointsQuestion { Readings = [] }.Collect(Content));
    }
}
