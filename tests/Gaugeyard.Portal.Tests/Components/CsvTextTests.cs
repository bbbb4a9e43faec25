using Gaugeyard.Portal.Components;
using Xunit;

namespace Gaugeyard.Portal.Tests.Components;

public sealed class CsvTextTests
{
    [Theory]
    [InlineData("+0.62", "+0.62")]
    [InlineData("\u22120.62", "-0.62")]
    [InlineData("=1+1", "'=1+1")]
    [InlineData("+cmd", "'+cmd")]
    [InlineData("-cmd", "'-cmd")]
    [InlineData("@name", "'@name")]
    [InlineData("a, \"b\"", "\"a, \"\"b\"\"\"")]
    public void Numbers_stay_numbers_and_formulas_become_text(string shown, string cell) =>
        Assert.Equal(cell + "\r\n", CsvText.Of([[shown]]));
}
