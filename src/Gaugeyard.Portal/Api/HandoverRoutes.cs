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
            return await HandoverFile.OfAsync(handover, format ?? "xlsx", cancel);
        }).Produces(200, contentType: "application/octet-stream").ProducesProblem(400).ProducesProblem(404).WithName("handover").WithTags("Hand over");
}

/// <summary>One hand-over in one format, written to where it may be large.</summary>
internal static class HandoverFile
{
    /// <param name="content">What is handed over.</param>
    /// <param name="format">xlsx, csv or json.</param>
    /// <param name="cancel">Stops the writing.</param>
    public static async Task<IResult> OfAsync(HandoverContent content, string format, CancellationToken cancel)
    {
        Action<Stream> write;
        string type;
        switch (format)
        {
            case "xlsx":
                (write, type) = (s => HandoverWorkbook.Write(s, content, cancel), "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet");
                break;
            case "csv":
                (write, type) = (s => HandoverCsv.Write(s, content, cancel), "text/csv; charset=utf-8");
                break;
            case "json":
                (write, type) = (s => HandoverJson.Write(s, content, cancel), "application/json; charset=utf-8");
                break;
            default:
                throw new RequestException(400, "The request is wrong", $"format must be xlsx, csv or json, but is '{format}'.");
        }
        // a file that deletes itself: the answer may be larger than memory should hold, and half an answer is worse than a problem
        var file = new FileStream(Path.Combine(Path.GetTempPath(), "gaugeyard-" + Path.GetRandomFileName()), FileMode.CreateNew, FileAccess.ReadWrite, FileShare.None, 1 << 16, FileOptions.DeleteOnClose);
        try
        {
            await Task.Run(() => write(file), cancel);
            file.Position = 0;
            return Results.File(file, type, $"{Safe(content.RunSet.Name)} revision {content.RunSet.Revision}.{format}");
        }
        catch
        {
            await file.DisposeAsync();
            throw;
        }
    }

    private static string Safe(string name) => new([.. name.Select(c => char.IsLetterOrDigit(c) || c is ' ' or '-' or '_' or '.' ? c : '-').Take(80)]);
}
