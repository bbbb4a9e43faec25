using Gaugeyard.Browser.Tests.Driving;
using Microsoft.Playwright;
using Xunit;

[assembly: AssemblyFixture(typeof(PortalInBrowser))]

namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>One portal and one browser for all browser tests.</summary>
public sealed class PortalInBrowser : IAsyncLifetime
{
    private RunningPortal? _portal;
    private IPlaywright? _playwright;
    private IBrowser? _browser;

    /// <summary>Address of the portal.</summary>
    public string Address => _portal!.Address;

    /// <summary>Everything the portal wrote to its console.</summary>
    public string Said => _portal!.Said;

    public async ValueTask InitializeAsync()
    {
        string path = InstalledBrowser.Path;
        _portal = await RunningPortal.StartAsync();
        _playwright = await Playwright.CreateAsync();
        _browser = await _playwright.Chromium.LaunchAsync(new()
        {
            ExecutablePath = path,
            // as root there is no sandbox; the rest keeps the browser from calling home
            Args = ["--no-sandbox", "--disable-gpu", "--disable-background-networking", "--disable-component-update", "--disable-sync", "--no-first-run"],
        });
    }

    /// <summary>A new window with nothing remembered.</summary>
    /// <param name="width">CSS pixels.</param>
    public async Task<IPage> OpenAsync(int width = 1440, int height = 900, bool dark = false)
    {
        var context = await _browser!.NewContextAsync(new()
        {
            BaseURL = Address,
            ViewportSize = new() { Width = width, Height = height },
            ColorScheme = dark ? ColorScheme.Dark : ColorScheme.Light,
            ReducedMotion = ReducedMotion.Reduce,
            Locale = "en-GB",
            AcceptDownloads = true,
        });
        context.SetDefaultTimeout(60_000);
        return await context.NewPageAsync();
    }

    public async ValueTask DisposeAsync()
    {
        if (_browser is not null)
            await _browser.DisposeAsync();
        _playwright?.Dispose();
        if (_portal is not null)
            await _portal.DisposeAsync();
    }
}
