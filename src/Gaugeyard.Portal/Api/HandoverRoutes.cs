using Gaugeyard.Exchange.Handover;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Api;

/// <summary>The export of a revision with its marks, ledger and dictionary.</summary>
internal static class HandoverRoutes
{
    public static void MapHandover(this RouteGroupBuilder runSets) =>
        runSets.MapGet("{id}/handover", async (string id, string? format, int? revision, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
        {
            var info = await RunSetRoutes.FindAsync(store, id, revision, cancel);
            var content = await RunSetRoutes.OpenAsync(store, id, info.Revision, cancel);
            var ledger = (await store.LedgerAsync(id, cancel)).Where(e => e.Revision <= info.Revision).ToList();
            var handover = new HandoverContent(info, content, ledger);
            return HandoverFile.Of(handover, format ?? "xlsx");
        }).Produces(200, contentType: "application/octet-stream").ProducesProblem(400).ProducesProblem(404).WithName("handover").WithTags("Hand over");
}

/// <summary>One hand-over in one format, written to where it may be large.</summary>
internal static class HandoverFile
{
    public static IResult Of(HandoverContent content, string format)
    {
        string name = $"{Safe(content.RunSet.Name)} revision {content.RunSet.Revision}";
        return format switch
        {
            _ => throw new RequestException(400, "The request is wrong", $"format must be xlsx, csv or json, but is '{format}' ({name})."),
        };
    }

    private static string Safe(string name) => new([.. name.Select(c => char.IsLetterOrDigit(c) || c is ' ' or '-' or '_' or '.' ? c : '-').Take(80)]);
}
