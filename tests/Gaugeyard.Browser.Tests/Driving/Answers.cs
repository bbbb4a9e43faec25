using System.Diagnostics;
using Microsoft.Playwright;
using Xunit;

namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>Waiting for what people wait for: the finding in the heading.</summary>
internal static class Answers
{
    // a trial of ways to fill may take a while on a busy machine
    private static readonly TimeSpan Patience = TimeSpan.FromMinutes(4);

    private static readonly string[] Unfinished = ["Loading", "Looking at the file"];

    /// <summary>Waits until the heading stands and nothing on the page is still being computed, for a second on end: a page first shows its frame, then asks.</summary>
    public static async Task ArriveAsync(IPage page)
    {
        var heading = page.GetByRole(AriaRole.Heading, new() { Level = 1 });
        var working = page.GetByRole(AriaRole.Progressbar);
        var clock = Stopwatch.StartNew();
        string said = "";
        for (int quiet = 0; quiet < 4;)
        {
            Assert.True(clock.Elapsed < Patience, $"{page.Url} had no answer after {Patience.TotalMinutes:0} minutes; its heading says '{said}'");
            await Task.Delay(250);
            bool stands = await heading.CountAsync() > 0 && await working.CountAsync() == 0;
            said = stands ? string.Join(' ', await heading.AllInnerTextsAsync()) : "";
            quiet = stands && !Unfinished.Contains(said) ? quiet + 1 : 0;
        }
        Assert.DoesNotContain("could not be shown", said);
        Assert.DoesNotContain("nothing at this address", said);
    }
}
