using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Records.Tests.RunSets;

public sealed class RunSetEditsTests
{
    private static readonly ColumnDefinition Run = new("run", ColumnKind.Text) { Role = ColumnRole.RunName };
    private static readonly ColumnDefinition City = new("city", ColumnKind.Number) { Role = ColumnRole.Reading, Unit = "L/100km" };
    private static readonly ColumnDefinition Load = new("load", ColumnKind.OrderedCategory) { Levels = ["empty", "half", "full"] };

    private static RevisionContent Four() => RevisionContent.InMemory(
    [
        CodedColumn.FromTexts(Run, ["R1", "R2", "R3", "R4"]),
        new NumberColumn(City, [9.1, 9.3, 6.2, double.NaN]),
        CodedColumn.FromTexts(Load, ["empty", null, "full", "half"]),
    ]);

    [Fact]
    public void A_correction_keeps_the_original_and_leaves_the_earlier_revision_alone()
    {
        var before = Four();
        var after = Content(RunSetEdits.Correct(before, [new Correction(1, "city", 9.4, "sheet re-read")]));
        Assert.Equal(9.4, after.Column("city").ValueAt(0));
        Assert.Equal(CellState.Corrected, after.StateOf(after.Column("city"), 0));
        Assert.Equal("9.1", after.MarksOf("city")[1].Original);
        Assert.Equal(9.1, before.Column("city").ValueAt(0));
    }

    [Theory]
    [InlineData(1, "city", "fast", "not a number")]
    [InlineData(9, "city", "7", "no record 9")]
    [InlineData(1, "town", "7", "no column called 'town'")]
    [InlineData(1, "load", "double", "one of empty, half, full")]
    public void A_correction_that_does_not_fit_changes_nothing_and_says_why(int record, string column, string value, string says)
    {
        var error = Assert.Throws<EditException>(() => RunSetEdits.Correct(Four(), [new Correction(2, "city", 9.9, "fine"), new Correction(record, column, value, "why not")]));
        Assert.Contains(says.Replace("not a number", "is not a number"), error.Message);
        Assert.Single(error.Findings);
    }

    [Fact]
    public void Reasons_are_required()
    {
        Assert.Throws<EditException>(() => RunSetEdits.Correct(Four(), [new Correction(1, "city", 9.4, " ")]));
        Assert.Throws<EditException>(() => RunSetEdits.SetAside(Four(), [new Exclusion(1, null, "")]));
    }

    [Fact]
    public void A_record_or_a_cell_can_be_set_aside_and_put_back()
    {
        var aside = Content(RunSetEdits.SetAside(Four(), [new Exclusion(3, null, "wrong tyres"), new Exclusion(1, "city", "meter drift")]));
        Assert.Equal("wrong tyres", aside.SetAside[3]);
        Assert.Equal(CellState.SetAside, aside.StateOf(aside.Column("load"), 2));
        Assert.Equal(CellState.SetAside, aside.StateOf(aside.Column("city"), 0));
        Assert.Equal(9.1, aside.Column("city").ValueAt(0));
        var back = Content(RunSetEdits.PutBack(aside, [(3, null), (1, "city")]));
        Assert.Empty(back.SetAside);
        Assert.Equal(CellState.Measured, back.StateOf(back.Column("city"), 0));
        Assert.Throws<EditException>(() => RunSetEdits.PutBack(back, [(3, null)]));
    }

    [Fact]
    public void An_estimate_never_replaces_a_measured_value_and_lies_in_its_interval()
    {
        var filled = Content(RunSetEdits.Fill(Four(), "city", [new FilledCell(4, 7.5, 6.5, 8.5)], "group-mean", 0.95, "try"));
        Assert.Equal(CellState.Filled, filled.StateOf(filled.Column("city"), 3));
        Assert.Equal(6.5, filled.MarksOf("city")[4].Low);
        Assert.Throws<EditException>(() => RunSetEdits.Fill(Four(), "city", [new FilledCell(1, 7.5, 6.5, 8.5)], "group-mean", 0.95, "try"));
        Assert.Throws<EditException>(() => RunSetEdits.Fill(Four(), "city", [new FilledCell(4, 7.5, 8, 8.5)], "group-mean", 0.95, "try"));
    }

    [Fact]
    public void Turning_consumption_into_economy_swaps_the_ends_of_a_filled_interval()
    {
        var filled = Content(RunSetEdits.Fill(Four(), "city", [new FilledCell(4, 8, 5, 10)], "group-mean", 0.95, "try"));
        var turned = Content(ColumnChanges.Apply(filled, "city", new ColumnChange { Unit = "km/L", Convert = true }));
        Assert.Equal(12.5, turned.Column("city").ValueAt(3));
        Assert.Equal(10, turned.MarksOf("city")[4].Low);
        Assert.Equal(20, turned.MarksOf("city")[4].High);
        Assert.Equal("km/L", turned.Find("city")!.Unit);
    }

    [Fact]
    public void Kinds_change_only_when_every_value_fits()
    {
        var category = Content(ColumnChanges.Apply(Four(), "city", new ColumnChange { Kind = ColumnKind.Category }));
        Assert.Equal("9.1", category.Column("city").ValueAt(0));
        Assert.Null(category.Find("city")!.Unit);
        var number = Content(ColumnChanges.Apply(category, "city", new ColumnChange { Kind = ColumnKind.Number }));
        Assert.Equal(9.1, number.Column("city").ValueAt(0));
        Assert.Contains("'R1' is not a number", Assert.Throws<EditException>(() => ColumnChanges.Apply(Four(), "run", new ColumnChange { Kind = ColumnKind.Number })).Message);
    }

    [Fact]
    public void A_code_for_missing_empties_its_cells_and_keeps_what_they_said()
    {
        var cleaned = Content(ColumnChanges.Apply(Four(), "city", new ColumnChange { MissingCodes = ["6.2"] }));
        Assert.True(cleaned.Column("city").IsMissing(2));
        Assert.Equal("6.2", cleaned.MarksOf("city")[3].Original);
    }

    [Theory]
    [InlineData(OnRepeat.Keep, 6)]
    [InlineData(OnRepeat.Skip, 5)]
    [InlineData(OnRepeat.Replace, 5)]
    public void Later_records_get_new_numbers_and_repeats_are_kept_skipped_or_replaced(OnRepeat onRepeat, int records)
    {
        Column[] more = [CodedColumn.FromTexts(Run, ["R2", "R5"]), new NumberColumn(City, [1.5, 2.5]), CodedColumn.FromTexts(new ColumnDefinition("site", ColumnKind.Category), ["north", "south"])];
        var grown = Content(RunSetGrowth.Append(Four(), more, new Dictionary<string, IReadOnlyDictionary<int, CellMark>>(), onRepeat, highestRecord: 7));
        Assert.Equal(records, grown.Count);
        Assert.Equal(8, grown.Numbers[4]);
        Assert.True(grown.Column("site").IsMissing(0));
        Assert.Equal("south", grown.Column("site").ValueAt(records - 1));
        Assert.Equal(onRepeat == OnRepeat.Replace ? 1.5 : 9.3, grown.Column("city").ValueAt(1));
        Assert.True(grown.Column("load").IsMissing(records - 1));
    }

    [Fact]
    public void A_later_file_that_does_not_fit_adds_nothing()
    {
        var error = Assert.Throws<EditException>(() => RunSetGrowth.Append(Four(), [CodedColumn.FromTexts(new ColumnDefinition("city", ColumnKind.Text), ["fast"])],
            new Dictionary<string, IReadOnlyDictionary<int, CellMark>>(), OnRepeat.Keep, 4));
        Assert.Contains("'fast' is not a number", error.Message);
    }

    private static RevisionContent Content(RevisionDraft draft) =>
        new("set", 2, "f", [.. draft.Columns.Select(c => c.Definition)], draft.Numbers, i => draft.Columns[i], draft.Marks, draft.SetAside);
}
