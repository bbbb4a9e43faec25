using System.Text.Json;
using System.Text.Json.Nodes;
using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Api;

/// <summary>Makes an endpoint of a question: the body is the question, the answer is the answer.</summary>
internal static class QuestionRoutes
{
    /// <summary>
    /// Maps POST {id}/name. With <c>Prefer: respond-async</c> the work becomes a job.
    /// </summary>
    public static RouteHandlerBuilder MapQuestion<TQuestion, TAnswer>(this RouteGroupBuilder runSets, string name)
        where TQuestion : Question<TAnswer>
        where TAnswer : Answer =>
        runSets.MapPost($"{{id}}/{name}", async (string id, HttpContext http, Answerer answerer, IRunSetStore store, JobBoard jobs, CancellationToken cancel) =>
        {
            var content = await store.OpenAsync(id, cancel: cancel) ?? throw new NoSuchRunSetException(id);
            var (question, ignored) = await ReadAsync<TQuestion>(http, cancel);
            if (question.Revision is { } revision && revision != content.Revision)
                content = await store.OpenAsync(id, revision, cancel) ?? throw new NoSuchRunSetException(id, revision);
            async Task<object> Work(IProgress<WorkProgress>? progress, CancellationToken stop)
            {
                var answer = await answerer.AskAsync(content, question, progress, stop);
                return ignored.Count == 0 ? answer : answer with { Notes = [.. answer.Notes, .. ignored] };
            }
            if (!WantsJob(http))
                return Results.Json(await Work(null, cancel), WireFormat.Json);
            var job = jobs.Start(Work);
            return Results.Accepted($"/api/v1/jobs/{job.Id}", job.State());
        }).Accepts<TQuestion>("application/json").Produces<TAnswer>().Produces(StatusCodes.Status202Accepted).ProducesProblem(400).ProducesProblem(404).ProducesProblem(422).WithName(name).WithTags("Questions");

    public static bool WantsJob(HttpContext http) => http.Request.Headers["Prefer"].ToString().Contains("respond-async", StringComparison.OrdinalIgnoreCase);

    /// <summary>Reads a body; fields it does not know are named rather than passed over in silence.</summary>
    public static async Task<(T Body, List<string> Ignored)> ReadAsync<T>(HttpContext http, CancellationToken cancel)
    {
        var node = await JsonNode.ParseAsync(http.Request.Body, cancellationToken: cancel);
        if (node is not JsonObject body)
            throw new RequestException(400, "The request is wrong", "The body must be a JSON object with the fields of the question.");
        var known = WireFormat.Json.GetTypeInfo(typeof(T)).Properties.Select(p => p.Name).ToHashSet(StringComparer.OrdinalIgnoreCase);
        var ignored = body.Select(p => p.Key).Where(k => !known.Contains(k)).Select(k => $"The field '{k}' is not known here and was ignored.").ToList();
        return (body.Deserialize<T>(WireFormat.Json)!, ignored);
    }
}
