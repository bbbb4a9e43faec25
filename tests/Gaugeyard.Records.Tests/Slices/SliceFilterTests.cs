using System.Text.Json;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Xunit;

namespace Gaugeyard.Records.Tests.Slices;

public sealed class SliceFilterTests
{
    private static readonly RevisionContent Content = RevisionContent.InMemory(
        [
            new NumberColumn(new ColumnDefinition("mass", ColumnKind.Number), [1000, 1500, double.NaN, 2000]),
            CodedColumn.FromTexts(new ColumnDefinition("class", ColumnKind.Category), ["car", "van", "van", null]),
            CodedColumn.FromTexts(new ColumnDefinition("wet", ColumnKind.YesNo), ["yes", "no", "yes", null]),
            new DateTimeColumn(new ColumnDefinition("day", ColumnKind.DateTime), [.. new[] { "2031-04-03", "2031-04-03T14:00", "2031-04-04", "2031-05-01" }.Select(d => DateTime.Parse(d).Ticks)]),
        ],
        new Dictionary<string, IReadOnlyDictionary<int, CellMark>> { ["mass"] = new Dictionary<int, CellMark> { [4] = new(CellState.Filled) } });

    [Theory]
    [InlineData("""{"column":"mass","from":1000,"to":1500}""", "1100")]
    [InlineData("""{"column":"mass","is":[2000]}""", "0001")]
    [InlineData("""{"column":"mass","state":"missing"}""", "0010")]
    [InlineData("""{"column":"mass","state":"filled"}""", "0001")]
    [InlineData("""{"column":"mass","state":"measured"}""", "1100")]
    [InlineData("""{"column":"class","is":["van"]}""", "0110")]
    [InlineData("""{"column":"class","is":["van",null]}""", "0111")]
    [InlineData("""{"column":"wet","is":[true]}""", "1010")]
    [InlineData("""{"column":"day","from":"2031-04-03","to":"2031-04-03"}""", "1100")]
    [InlineData("""{"column":"day","from":"2031-04-04"}""", "0011")]
    public void Picks_the_records_that_meet_the_condition(string condition, string expected)
    {
        var keep = SliceFilter.Select(Content, [JsonSerializer.Deserialize<SliceCondition>(condition, JsonSerializerOptions.Web)!]);
        Assert.Equal(expected, string.Concat(keep.Select(k => k ? '1' : '0')));
    }

    [Theory]
    [InlineData("""{"column":"size","is":[1]}""", "no")]
    [InlineData("""{"column":"class","from":1}""", "pick values")]
    [InlineData("""{"column":"mass","is":["heavy"]}""", "Give a number")]
    [InlineData("""{"column":"mass"}""", "neither")]
    public void A_condition_that_cannot_be_applied_says_what_to_do(string condition, string says) =>
        Assert.Contains(says, Assert.Throws<SliceException>(() => SliceFilter.Select(Content, [JsonSerializer.Deserialize<SliceCondition>(condition, JsonSerializerOptions.Web)!])).Message);
}
