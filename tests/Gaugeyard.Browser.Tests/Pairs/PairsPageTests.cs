using Gaugeyard.Browser.Tests.Driving;
using Microsoft.Playwright;
using Xunit;

namespace Gaugeyard.Browser.Tests.Pairs;

/// <summary>The Pairs page on the demo season.</summary>
public sealed class PairsPageTests(PortalInBrowser portal)
{
    private async Task<IPage> OpenAsync(string query = "", int width = 1440)
    {
        using var http = new HttpClient { BaseAddress = new Uri(portal.Address) };
        using var sets = System.Text.Json.JsonDocument.Parse(await http.GetStringAsync("/api/v1/run-sets"));
        string id = sets.RootElement.EnumerateArray().Single(s => s.GetProperty("name").GetString()!.Contains("Ottermoor", StringComparison.Ordinal)).GetProperty("id").GetString()!;
        var page = await portal.OpenAsync(width);
        await page.GotoAsync($"/sets/{id}/pairs{query}");
        await page.GetByRole(AriaRole.Heading, new() { Name = "Stand-outs and why" }).WaitForAsync();
        await page.Locator("[aria-roledescription='scatter matrix'][aria-label*='records']").WaitForAsync();
        return page;
    }

    private const string Readings = "?readings=City%20consumption%7CHighway%20consumption%7CTest%20mass%7CPower";

    [Fact]
    public async Task It_names_a_planted_slip_and_opens_its_record()
    {
        var page = await OpenAsync(Readings);
        // truth of the demo season: run OM4-0439 has the first two digits of its test mass transposed
        var item = page.Locator("ol.odd li", new() { HasText = "OM4-0439" });
        Assert.Contains("two digits swapped", await item.InnerTextAsync(), StringComparison.Ordinal);
        await item.GetByRole(AriaRole.Button).ClickAsync();
        await page.GetByRole(AriaRole.Heading, new() { Name = "1 of 1,965 records selected" }).WaitForAsync();
        await page.Locator("section[aria-label='Selected records']").GetByRole(AriaRole.Button, new() { Name = "439", Exact = true }).ClickAsync();
        Assert.Contains("7,148", await page.GetByRole(AriaRole.Region, new() { Name = "Record 439" }).InnerTextAsync(), StringComparison.Ordinal);
    }

    [Fact]
    public async Task The_keyboard_alone_chooses_a_pair_and_selects_a_range_that_becomes_the_slice()
    {
        var page = await OpenAsync(Readings);
        var matrix = page.Locator("[aria-roledescription='scatter matrix']");
        await matrix.FocusAsync();
        await page.Keyboard.PressAsync("ArrowDown");
        await Assertions.Expect(matrix).ToHaveAttributeAsync("aria-label", new System.Text.RegularExpressions.Regex("^Test mass against City consumption"));
        await page.GetByText("Select by range").ClickAsync();
        await page.GetByLabel("Reading of the range").SelectOptionAsync("Test mass");
        await page.GetByLabel("Range from").FillAsync("2500");
        await page.GetByRole(AriaRole.Button, new() { Name = "Select", Exact = true }).ClickAsync();
        await page.GetByRole(AriaRole.Heading, new() { NameRegex = new("of 1,965 records selected") }).WaitForAsync();
        await page.GetByRole(AriaRole.Button, new() { Name = "Make these a slice" }).ClickAsync();
        await Assertions.Expect(page).ToHaveURLAsync(new System.Text.RegularExpressions.Regex("slice="), new() { Timeout = 60_000 });
        Assert.Contains("2500", Uri.UnescapeDataString(page.Url), StringComparison.Ordinal);
    }

    [Fact]
    public async Task Dragging_selects_the_same_records_everywhere_and_escape_clears()
    {
        var page = await OpenAsync(Readings);
        var box = (await page.Locator("[aria-roledescription='scatter matrix']").BoundingBoxAsync())!;
        await page.Mouse.MoveAsync(box.X + box.Width * 0.55f, box.Y + 40);
        await page.Mouse.DownAsync();
        await page.Mouse.MoveAsync(box.X + box.Width * 0.8f, box.Y + box.Height * 0.3f, new() { Steps = 5 });
        await page.Mouse.UpAsync();
        await page.Locator("section[aria-label='Selected records']").WaitForAsync();
        await page.Locator("[aria-roledescription='scatter matrix']").PressAsync("Escape");
        await Assertions.Expect(page.Locator("section[aria-label='Selected records']")).ToHaveCountAsync(0);
    }

    [Fact]
    public async Task A_phone_shows_the_large_pair_first_and_nothing_sticks_out()
    {
        var page = await OpenAsync(Readings, width: 390);
        Assert.True(await page.EvaluateAsync<bool>("() => document.documentElement.scrollWidth <= innerWidth"));
        await page.ScreenshotAsync(new() { Path = Repository.Picture("pairs-390"), FullPage = true });
    }
}
