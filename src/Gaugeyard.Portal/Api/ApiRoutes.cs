namespace Gaugeyard.Portal.Api;

/// <summary>The HTTP interface, version 1: one file per area, mapped here.</summary>
internal static class ApiRoutes
{
    public static void MapApi(this WebApplication app)
    {
        var api = app.MapGroup("/api/v1");
        api.MapJobs();
        var runSets = api.MapGroup("run-sets");
        runSets.MapRunSets();
        runSets.MapHandover();
        runSets.MapGroups();
        runSets.MapPairs();
        runSets.MapInfluences();
        runSets.MapCurves();
        runSets.MapFill();
        app.MapOpenApi();
    }
}
