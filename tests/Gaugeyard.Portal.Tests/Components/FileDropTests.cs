using Bunit;
using Gaugeyard.Portal.Components;
using Gaugeyard.Portal.Layout;
using Microsoft.Extensions.DependencyInjection;
using Xunit;

namespace Gaugeyard.Portal.Tests.Components;

public sealed class FileDropTests : BunitContext
{
    public FileDropTests() => Services.AddScoped<Browser>();

    [Fact]
    public async Task A_file_on_its_way_can_be_stopped_and_another_chosen()
    {
        var module = JSInterop.SetupModule("/shell/page.js");
        module.SetupVoid("upload", _ => true).SetVoidResult();
        var stop = module.SetupVoid("stopUpload", _ => true).SetVoidResult();
        var drop = Render<FileDrop>();

        await drop.InvokeAsync(() => drop.Instance.UploadProgress(0.3));
        await drop.Find(".working button").ClickAsync(new());
        Assert.Single(stop.Invocations);

        await drop.InvokeAsync(() => drop.Instance.UploadDone(-1, ""));
        Assert.NotNull(drop.Find("input[type=file]"));
        Assert.Contains("Stopped", drop.Markup, StringComparison.Ordinal);
    }

    [Fact]
    public async Task What_the_portal_says_of_a_refused_file_is_shown()
    {
        JSInterop.SetupModule("/shell/page.js").SetupVoid("upload", _ => true).SetVoidResult();
        var drop = Render<FileDrop>();
        await drop.InvokeAsync(() => drop.Instance.UploadDone(400, "runs.csv is empty."));
        Assert.Equal("runs.csv is empty.", drop.Find("[role=alert]").TextContent.Trim());
    }
}
