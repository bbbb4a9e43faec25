using System.Text.RegularExpressions;
using Microsoft.Playwright;
using static Microsoft.Playwright.Assertions;

namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>Waiting for what people wait for: the finding in the heading.</summary>
internal static partial class Answers
{
    /// <summary>Waits until the page is connected and nothing on it is still being computed.</summary>
    public static async Task ArriveAsync(IPage page)
    {
        await Expect(page.GetByRole(AriaRole.Heading, new() { Level = 1 })).ToBeVisibleAsync(new() { Timeout = 60_000 });
        await Expect(page.Locator("[aria-busy=true]")).ToHaveCountAsync(0, new() { Timeout = 180_000 });
        await Expect(page.GetByRole(AriaRole.Heading, new() { Level = 1 })).Not.ToHaveTextAsync(Failure(), new() { Timeout = 5_000 });
    }

    [GeneratedRegex("could not be shown|nothing at this address")]
    private static partial Regex Failure();
}
