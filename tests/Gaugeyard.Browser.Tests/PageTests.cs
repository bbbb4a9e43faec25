using Deque.AxeCore.Playwright;
using Gaugeyard.Browser.Tests.Driving;
using Microsoft.Playwright;
using Xunit;

namespace Gaugeyard.Browser.Tests;

/// <summary>Every page, light and dark, on a desk and on a phone: it answers, it is accessible, it fits; a picture of it is kept for people to look at.</summary>
public class PageTests(PortalInBrowser portal)
{
    public static TheoryData<string, bool, int, int> Everywhere
    {
        get
        {
            var all = new TheoryData<string, bool, int, int>();
            foreach (string page in new[] { "", "records", "groups", "pairs", "influences", "curves", "fill", "brief", "ledger", "hand-over" })
                foreach (bool dark in new[] { false, true })
                {
                    all.Add(page, dark, 1440, 900);
                    all.Add(page, dark, 390, 844);
                }
            return all;
        }
    }

    [Theory]
    [MemberData(nameof(Everywhere))]
    public async Task A_page_answers_is_accessible_and_fits(string name, bool dark, int width, int height)
    {
        using var script = new PortalOverHttp(portal.Address);
        string id = await script.DemoAsync();
        var page = await portal.OpenAsync(width, height, dark);
        var complaints = new List<string>();
        page.Console += (_, message) =>
        {
            if (message.Type == "error")
                complaints.Add(message.Text);
        };
        page.PageError += (_, error) => complaints.Add(error);
        var response = await page.GotoAsync(name.Length == 0 ? "/" : $"/sets/{id}/{name}");
        Assert.Equal(200, response!.Status);
        await Answers.ArriveAsync(page);
        await page.ScreenshotAsync(new() { Path = Repository.Picture($"{(name.Length == 0 ? "run-sets" : name)}-{width}-{(dark ? "dark" : "light")}"), FullPage = true });

        Assert.Empty(complaints);
        var axe = await page.RunAxe();
        Assert.True(axe.Violations.Length == 0, string.Join('\n', axe.Violations.Select(v => $"{v.Id} ({v.Impact}): {v.Help}: {string.Join(" | ", v.Nodes.Take(3).Select(n => n.Html))}")));
        int overflow = await page.EvaluateAsync<int>("document.documentElement.scrollWidth - document.documentElement.clientWidth");
        Assert.True(overflow <= 0, $"the page is {overflow} px wider than the window");
        await page.Context.CloseAsync();
    }
}
