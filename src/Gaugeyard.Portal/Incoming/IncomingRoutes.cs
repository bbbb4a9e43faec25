using Gaugeyard.Portal.Api;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Incoming;

/// <summary>What pages fetch outside the circuit: uploads on their way in, pinned pictures.</summary>
internal static class IncomingRoutes
{
    public static void MapIncoming(this WebApplication app)
    {
        app.MapPost("/incoming", async (HttpContext http, Intake intake, CancellationToken cancel) =>
        {
            // only a page of this portal may send here; a foreign page cannot set or fake this header
            string site = http.Request.Headers["Sec-Fetch-Site"].ToString();
            if (site.Length > 0 && site != "same-origin")
                return Results.Text("Files can only be sent from a page of this portal.", statusCode: 403);
            try
            {
                var upload = await UploadForm.ReadAsync(http, intake, cancel);
                return Results.Text(string.Join(',', upload.Files.Select(f => f.Key)));
            }
            catch (RequestException e)
            {
                return Results.Text(e.Message, statusCode: e.Status);
            }
        }).DisableAntiforgery().ExcludeFromDescription();

        app.MapGet("/brief/{id}/{pin:long}.svg", async (string id, long pin, IRunSetStore store, HttpContext http, CancellationToken cancel) =>
        {
            var found = (await store.PinsAsync(id, cancel)).FirstOrDefault(p => p.Id == pin);
            if (found?.Result.Picture is not { } svg)
                return Results.NotFound();
            // a picture is shown as an image and may not run anything even when opened by itself
            http.Response.Headers.ContentSecurityPolicy = "default-src 'none'; style-src 'unsafe-inline'; sandbox";
            return Results.Text(svg, "image/svg+xml");
        }).ExcludeFromDescription();
    }
}
