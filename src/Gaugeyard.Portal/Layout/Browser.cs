using Microsoft.JSInterop;

namespace Gaugeyard.Portal.Layout;

/// <summary>The few things a page asks of its browser (wwwroot/shell/page.js). One per circuit.</summary>
public sealed class Browser(IJSRuntime js) : IAsyncDisposable
{
    private Task<IJSObjectReference>? _module;

    /// <summary>The module, loaded once.</summary>
    public Task<IJSObjectReference> Module => _module ??= js.InvokeAsync<IJSObjectReference>("import", "/shell/page.js").AsTask();

    public async Task CopyAsync(string text) => await (await Module).InvokeVoidAsync("copy", text);

    public async Task SaveAsync(string name, string text, string type) => await (await Module).InvokeVoidAsync("save", name, text, type);

    /// <summary>The page's first picture as SVG text, or null.</summary>
    public async Task<string?> PictureAsync() => await (await Module).InvokeAsync<string?>("picture");

    public async Task SaveSvgAsync(string name) => await (await Module).InvokeVoidAsync("saveSvg", name);

    public async Task SavePngAsync(string name) => await (await Module).InvokeVoidAsync("savePng", name);

    public async Task PrintAsync() => await (await Module).InvokeVoidAsync("print");

    public async ValueTask DisposeAsync()
    {
        if (_module is null)
            return;
        try
        {
            await (await _module).DisposeAsync();
        }
        catch (JSDisconnectedException)
        {
            // the window has gone
        }
    }
}
