using Gaugeyard.Browser.Tests.Driving;
using Xunit;

namespace Gaugeyard.Browser.Tests;

/// <summary>The portal as it starts from a fresh folder.</summary>
public class FrontDoorTests(PortalInBrowser portal)
{
    [Fact]
    public async Task The_demo_season_is_there_at_first_start()
    {
        using var http = new HttpClient { BaseAddress = new Uri(portal.Address) };
        string answer = await http.GetStringAsync("/api/v1/run-sets");
        Assert.Contains("Ottermoor", answer);
        Assert.Contains("1965", answer);
        Assert.DoesNotContain("fail:", portal.Said);
    }
}
