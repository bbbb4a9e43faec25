using Gaugeyard.Statistics.Filling;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Filling;

public sealed class LittleReferenceTests
{
    [Theory]
    [InlineData("em_little_nhanes_4")]
    [InlineData("em_little_cars93_4")]
    public void Little_test_agrees_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("10_missing").First(x => x.Id == id).Case;
        var data = Data(c.GetProperty("data").GetString()!);
        double[][] columns = [.. c.GetProperty("spec").GetProperty("columns").EnumerateArray().Select(e => data[e.GetString()!].Select(Number).ToArray())];
        var result = LittleTest.Of(columns)!;
        Near(Number(c.GetProperty("values").GetProperty("d2_ml")), result.Statistic, 1e-6, "d2");
        Assert.Equal(Number(c.GetProperty("values").GetProperty("df")), result.Df);
        Near(Number(c.GetProperty("values").GetProperty("p_ml")), result.P, 1e-5, "p");
    }
}
