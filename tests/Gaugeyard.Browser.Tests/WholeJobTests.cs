using System.Text.RegularExpressions;
using Gaugeyard.Browser.Tests.Driving;
using Gaugeyard.Browser.Tests.Truth;
using Microsoft.Playwright;
using Xunit;
using static Microsoft.Playwright.Assertions;

namespace Gaugeyard.Browser.Tests;

/// <summary>The whole job as a person does it: the messy workbook in, every question asked, estimates accepted, the workbook taken home and opened.</summary>
public class WholeJobTests(PortalInBrowser portal)
{
    [Fact]
    public async Task From_the_messy_workbook_to_the_marked_one()
    {
        var page = await portal.OpenAsync();
        await page.GotoAsync("/");
        await TakeInAsync(page);

        await AskAsync(page, "Groups", "L/100");
        await Expect(page.GetByRole(AriaRole.Table).First).ToContainTextAsync("Pickup");
        await AskAsync(page, "Pairs", "stand");
        await AskAsync(page, "Influences", "City consumption");
        await AskAsync(page, "Curves", "City consumption");

        await AskAsync(page, "Fill", "hidden readings");
        await page.GetByLabel("Way", new() { Exact = true }).SelectOptionAsync("stepwise-regression");
        var accept = page.GetByRole(AriaRole.Button, new() { NameRegex = new Regex(@"^Accept \d+ estimates as revision 2$") });
        await Expect(accept).ToBeEnabledAsync(new() { Timeout = 240_000 });
        int promised = int.Parse(Regex.Match(await accept.InnerTextAsync(), @"\d+").Value);
        await accept.ClickAsync();
        await Expect(page.GetByText($"Revision 2 holds {promised} estimates, each marked.")).ToBeVisibleAsync(new() { Timeout = 120_000 });

        await page.GetByRole(AriaRole.Link, new() { Name = "Hand over" }).First.ClickAsync();
        await Expect(page.GetByRole(AriaRole.Heading, new() { Level = 1 })).ToContainTextAsync($"{promised} cells filled and marked", new() { Timeout = 60_000 });
        var download = await page.RunAndWaitForDownloadAsync(() => page.GetByRole(AriaRole.Link, new() { Name = "Workbook (XLSX)" }).ClickAsync());
        string file = Path.Combine(Directory.CreateTempSubdirectory("gaugeyard-whole-job").FullName, "season.xlsx");
        await download.SaveAsAsync(file);

        var workbook = HandedOver.Open(file, "City consumption");
        Assert.Equal(1965, workbook.Records);
        Assert.Equal(promised, workbook.Filled.Count);
        Assert.All(workbook.Filled, f => Assert.True(f.Shaded, $"run {f.Run} is filled but not shaded"));
        var coverage = workbook.AgainstTruth();
        Assert.True(coverage.Low <= 0.95 && 0.95 <= coverage.High, $"the intervals hold the truth in {coverage.Rate:P1} of {coverage.Runs} runs of {coverage.Vehicles} vehicles ({coverage.Low:P1} to {coverage.High:P1}), which excludes 95 %");
        Directory.Delete(Path.GetDirectoryName(file)!, recursive: true);
        await page.Context.CloseAsync();
    }

    private static async Task TakeInAsync(IPage page)
    {
        var preview = page.GetByRole(AriaRole.Heading, new() { NameRegex = new Regex(@"^(About )?[\d,]+ records in 24 columns") });
        // the file is heard once the page is live
        for (int attempt = 0; attempt < 8 && !await preview.IsVisibleAsync(); attempt++)
        {
            if (!page.Url.Contains("/import/", StringComparison.Ordinal))
                await page.GetByLabel("Choose a file").SetInputFilesAsync(Repository.DemoData("ottermoor-season-4.xlsx"));
            try
            {
                await preview.WaitForAsync(new() { Timeout = 15_000 });
            }
            catch (TimeoutException)
            {
                // once more
            }
        }
        await Expect(preview).ToBeVisibleAsync();
        // settle the page: every column of the workbook was recognised
        await Expect(page.GetByLabel("Role of Vehicle", new() { Exact = true })).ToHaveValueAsync(new Regex("vehicle", RegexOptions.IgnoreCase));
        await page.GetByLabel("Name of the run set").FillAsync("Season from the track office");
        await page.GetByRole(AriaRole.Button, new() { NameRegex = new Regex("^Store") }).ClickAsync();
        await page.WaitForURLAsync(new Regex("/sets/[^/]+/records"), new() { Timeout = 120_000 });
        await Expect(page.GetByRole(AriaRole.Heading, new() { Level = 1 })).ToContainTextAsync("1,965 records in 24 columns of 160 vehicles", new() { Timeout = 60_000 });
    }

    private static async Task AskAsync(IPage page, string name, string heading)
    {
        await page.GetByRole(AriaRole.Navigation, new() { Name = "Questions", Exact = true }).GetByRole(AriaRole.Link, new() { NameRegex = new Regex("^" + name) }).ClickAsync();
        await page.WaitForURLAsync(new Regex("/sets/[^/]+/" + name.ToLowerInvariant()));
        await Answers.ArriveAsync(page);
        await Expect(page.GetByRole(AriaRole.Heading, new() { Level = 1 })).ToContainTextAsync(heading, new() { Timeout = 240_000, IgnoreCase = true });
    }
}
