using Gaugeyard.Portal.Access;
using Gaugeyard.Portal.Components;
using Xunit;

namespace Gaugeyard.Portal.Tests.Access;

public sealed class NetworkGuardTests
{
    [Theory]
    [InlineData("http://127.0.0.1:5000", true)]
    [InlineData("http://localhost:5000", true)]
    [InlineData("http://[::1]:5000", true)]
    [InlineData("http://0.0.0.0:5000", false)]
    [InlineData("http://*:5000", false)]
    [InlineData("http://+:80", false)]
    [InlineData("http://192.168.1.4:5000", false)]
    [InlineData("http://yard.example:5000", false)]
    public void Only_loopback_is_closed_to_others(string address, bool loopback) => Assert.Equal(loopback, NetworkGuard.IsLoopback(address));

    [Fact]
    public void Exported_text_never_becomes_a_formula() =>
        Assert.Equal("'=1+1,-3.5,\"a,b\",'-cmd\r\n", CsvText.Of([["=1+1", "\u22123.5", "a,b", "-cmd"]]));
}
