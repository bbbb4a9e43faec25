using System.Net;
using Gaugeyard.Browser.Tests.Driving;
using Gaugeyard.Browser.Tests.Truth;
using Xunit;

namespace Gaugeyard.Browser.Tests;

/// <summary>The whole job as a nightly script does it, on the messy workbook.</summary>
public class ScriptedJobTests(PortalInBrowser portal)
{
    private const string City = "City consumption";

    private static readonly string[] Predictors = ["Class", "Powertrain", "Test mass", "Displacement", "Power", "Frontal area", "Ambient temperature", "Highway consumption", "Route", "Wet"];

    [Fact]
    public async Task Filled_intervals_hold_the_hidden_truth_as_often_as_they_say()
    {
        using var script = new PortalOverHttp(portal.Address);
        var runSet = await script.UploadAsync(Repository.DemoData("ottermoor-season-4.xlsx"), "Scripted season");
        string id = runSet["id"]!.GetValue<string>();
        Assert.Equal(1965, runSet["records"]!.GetValue<int>());
        Assert.Equal(160, runSet["vehicles"]!.GetValue<int>());

        var filled = await script.AskAsync($"run-sets/{id}/fill", new { reading = City, way = "stepwise-regression", predictors = Predictors, note = "nightly fill" }, HttpStatusCode.Created);
        Assert.Equal(2, filled["revision"]!.GetValue<int>());
        int count = filled["filled"]!.AsArray().Count, refused = filled["refused"]!.AsArray().Count;
        Assert.Equal(HiddenReadings.ByRun.Count, count + refused);

        string file = Path.Combine(Directory.CreateTempSubdirectory("gaugeyard-handover").FullName, "season.xlsx");
        await File.WriteAllBytesAsync(file, await script.DownloadAsync($"run-sets/{id}/handover?format=xlsx"));
        var workbook = HandedOver.Open(file, City);
        Assert.Equal(1965, workbook.Records);
        Assert.Equal(count, workbook.Filled.Count);
        Assert.All(workbook.Filled, f => Assert.True(f.Shaded && f.Low < f.Value && f.Value < f.High, $"run {f.Run}: {f}"));
        var coverage = workbook.AgainstTruth();
        Assert.True(coverage.Low <= 0.95 && 0.95 <= coverage.High, $"the intervals hold the truth in {coverage.Rate:P1} of {coverage.Runs} runs of {coverage.Vehicles} vehicles ({coverage.Low:P1} to {coverage.High:P1}), which excludes 95 %");

        // the workbook comes home with its estimates still estimates
        var home = await script.UploadAsync(file, "Scripted season, read back");
        var city = home["columns"]!.AsArray().Single(c => c!["name"]!.GetValue<string>() == City)!;
        Assert.Equal(count, city["filled"]!.GetValue<int>());
        Directory.Delete(Path.GetDirectoryName(file)!, recursive: true);
    }
}
