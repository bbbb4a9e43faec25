using Gaugeyard.Analysis.Groups;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Analysis.Tests.Groups;

public sealed class GroupsQuestionTests
{
    // Pseudo-replication: runs counted as vehicles give p = 0.0002, the vehicles themselves 0.1306 (own data and computation; Hurlbert 1984 names the error).
    private static readonly double[][] Vehicles =
        [[7.02, 7.05, 6.98, 7.01], [7.41, 7.38, 7.44, 7.40], [7.20, 7.24, 7.18, 7.22], [7.52, 7.49, 7.55, 7.50], [7.31, 7.35, 7.28, 7.33], [7.70, 7.66, 7.73, 7.69]];

    private static RevisionContent Season(string? unit = null)
    {
        double[] values = [.. Vehicles.SelectMany(v => v)];
        return RevisionContent.InMemory(
        [
            CodedColumn.FromTexts(new ColumnDefinition("vehicle", ColumnKind.Category) { Role = ColumnRole.Vehicle }, [.. Enumerable.Range(0, 24).Select(i => $"V{i / 4}")]),
            CodedColumn.FromTexts(new ColumnDefinition("group", ColumnKind.Category), [.. Enumerable.Range(0, 24).Select(i => i < 12 ? "A" : "B")]),
            CodedColumn.FromTexts(new ColumnDefinition("tyre", ColumnKind.Category), [.. Enumerable.Range(0, 24).Select(i => i % 2 == 0 ? "old" : "new")]),
            new NumberColumn(new ColumnDefinition("city", ColumnKind.Number) { Role = ColumnRole.Reading, Unit = unit }, values),
        ]);
    }

    [Fact]
    public void Vehicles_are_counted_not_runs()
    {
        var answer = new ComparisonQuestion { Reading = "city", By = "group" }.Ask(Season(), WorkContext.None);
        Assert.Equal(0.1306, answer.Tests.Classical.P!.Value, 5e-5);
        Assert.Equal(0.298333, answer.Pairs[0].Difference, 5e-7);
        Assert.Contains("No two groups can be told apart", answer.Headline);
        var naive = new ComparisonQuestion { Reading = "city", By = "group", Vehicles = VehicleUse.Ignore }.Ask(Season(), WorkContext.None);
        Assert.Equal(0.000227, naive.Tests.Classical.P!.Value, 5e-7);
        Assert.Contains(naive.Notes, n => n.Contains("ignored as asked"));
    }

    [Fact]
    public void A_vehicle_that_runs_in_both_groups_is_compared_with_itself()
    {
        var answer = new ComparisonQuestion { Reading = "city", By = "tyre" }.Ask(Season(), WorkContext.None);
        Assert.NotNull(answer.Tests.Welch.Reason);
        Assert.Equal(5, answer.Pairs[0].Df);
        double[] differences = [.. Vehicles.Select(v => (v[0] + v[2]) / 2 - (v[1] + v[3]) / 2)];
        Assert.Equal(differences.Average(), answer.Pairs[0].Difference, 1e-12);
    }

    // EPA420-R-09-014 (2009), appendix A: at equal distances 16 and 24 mi/gal average to 19.2, not to 20.
    [Fact]
    public void Economy_is_averaged_as_consumption()
    {
        var content = RevisionContent.InMemory([new NumberColumn(new ColumnDefinition("city", ColumnKind.Number) { Role = ColumnRole.Reading, Unit = "mi/gal-us" }, [16, 24])]);
        var figures = new GroupsQuestion { Readings = ["city"] }.Ask(content, WorkContext.None).Groups[0].Readings["city"];
        Assert.Equal(20, figures.Mean!.Value, 1e-12);
        Assert.Equal(19.2, figures.AsConsumption!.Mean, 1e-12);
        // the turned interval stands in rising order
        Assert.True(figures.AsConsumption.High is null || figures.AsConsumption.Low < figures.AsConsumption.High);
    }

    [Fact]
    public void Odd_columns_get_a_sentence_never_a_crash()
    {
        var content = Season();
        Assert.Throws<QuestionException>(() => new GroupsQuestion { Readings = ["group"] }.Ask(content, WorkContext.None));
        Assert.Throws<QuestionException>(() => new GroupsQuestion { Readings = ["city"], Confidence = 1 }.Ask(content, WorkContext.None));
        Assert.Throws<CannotAnswerException>(() => new ComparisonQuestion { Reading = "city", By = "vehicle" }.Ask(content, WorkContext.None));
        var empty = RevisionContent.InMemory([new NumberColumn(new ColumnDefinition("city", ColumnKind.Number), [double.NaN, double.NaN])]);
        var figures = new GroupsQuestion { Readings = ["city"] }.Ask(empty, WorkContext.None).Groups[0].Readings["city"];
        Assert.Equal((0, 2, null), (figures.N, figures.Missing, figures.Mean));
    }
}
