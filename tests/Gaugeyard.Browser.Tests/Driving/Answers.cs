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
        var heading = page.GetByRole(AriaRole.Heading, new() { Level = 1 });
        await Expect(heading).ToBeVisibleAsync(new() { Timeout = Patience });
        await Expect(heading).Not.ToHaveTextAsync(Unfinished(), new() { Timeout = Patience });
        await Expect(page.GetByRole(AriaRole.Progressbar)).ToHaveCountAsync(0, new() { Timeout = Patience });
        await Expect(heading).Not.ToHaveTextAsync(Failure(), new() { Timeout = 5_000 });
    }

    // a trial of ways to fill may take a while on a busy machine
    private const float Patience = 240_000;

    [GeneratedRegex("^(Loading|Looking at the file)$")]
    private static partial Regex Unfinished();

    [GeneratedRegex("could not be shown|nothing at this address")]
    private static partial Regex Failure();
}
