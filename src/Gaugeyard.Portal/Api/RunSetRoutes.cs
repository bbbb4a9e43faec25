using System.Text.Json;
using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Portal.Incoming;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Api;

/// <summary>Run sets over HTTP: make, read, grow, correct, set aside, restore.</summary>
internal static class RunSetRoutes
{
    public static void MapRunSets(this RouteGroupBuilder runSets)
    {
        runSets.MapGet("", async (IRunSetStore store, CancellationToken cancel) =>
            Results.Json((await store.ListAsync(cancel)).Select(WireRunSet.Of), WireFormat.Json))
            .Produces<IReadOnlyList<WireRunSet>>().WithName("run-sets").WithTags("Run sets");

        runSets.MapPost("", async (HttpContext http, Intake intake, CancellationToken cancel) =>
        {
            var upload = await UploadForm.ReadAsync(http, intake, cancel);
            var info = await intake.CreateAsync(upload, WriteOptionsOf(http), cancel);
            return Results.Json(WireRunSet.Of(info), WireFormat.Json, statusCode: 201);
        }).DisableAntiforgery().Accepts<IFormFile>("multipart/form-data").Produces<WireRunSet>(201).ProducesProblem(400).ProducesProblem(422).WithName("upload").WithTags("Run sets");

        runSets.MapGet("{id}", async (string id, int? revision, IRunSetStore store, CancellationToken cancel) =>
            Results.Json(WireRunSet.Of(await FindAsync(store, id, revision, cancel)), WireFormat.Json))
            .Produces<WireRunSet>().ProducesProblem(404).WithName("run-set").WithTags("Run sets");

        runSets.MapDelete("{id}", async (string id, IRunSetStore store, CancellationToken cancel) =>
            await store.DeleteAsync(id, cancel) ? Results.NoContent() : throw new NoSuchRunSetException(id))
            .Produces(204).ProducesProblem(404).WithName("delete").WithTags("Run sets");

        runSets.MapPost("{id}/runs", async (string id, HttpContext http, Intake intake, CancellationToken cancel) =>
        {
            var upload = await UploadForm.ReadAsync(http, intake, cancel);
            var info = await intake.AppendAsync(id, ExpectedRevision(http), upload, WriteOptionsOf(http), cancel);
            return Results.Json(WireRunSet.Of(info), WireFormat.Json, statusCode: 201);
        }).DisableAntiforgery().Accepts<IFormFile>("multipart/form-data").Produces<WireRunSet>(201).ProducesProblem(400).ProducesProblem(412).ProducesProblem(422).WithName("append").WithTags("Run sets");

        runSets.MapPatch("{id}/columns/{name}", (string id, string name, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
            EditAsync(id, http, store, async content => ColumnChanges.Apply(content, name, (await QuestionRoutes.ReadAsync<ColumnChange>(http, cancel)).Body), cancel))
            .Accepts<ColumnChange>("application/json").Produces<WireRunSet>().ProducesProblem(412).ProducesProblem(422).WithName("column").WithTags("Run sets");

        runSets.MapPost("{id}/corrections", (string id, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
            EditAsync(id, http, store, async content => RunSetEdits.Correct(content, [.. (await ReadListAsync<WireCorrection>(http, cancel)).Select(c => c.Correction())]), cancel))
            .Accepts<WireCorrection[]>("application/json").Produces<WireRunSet>().ProducesProblem(412).ProducesProblem(422).WithName("corrections").WithTags("Run sets");

        runSets.MapPost("{id}/set-aside", (string id, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
            EditAsync(id, http, store, async content => RunSetEdits.SetAside(content, await ReadListAsync<Exclusion>(http, cancel)), cancel))
            .Accepts<Exclusion[]>("application/json").Produces<WireRunSet>().ProducesProblem(412).ProducesProblem(422).WithName("set-aside").WithTags("Run sets");

        runSets.MapPost("{id}/put-back", (string id, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
            EditAsync(id, http, store, async content => RunSetEdits.PutBack(content, [.. (await ReadListAsync<WirePutBack>(http, cancel)).Select(b => (b.Record, b.Column))]), cancel))
            .Accepts<WirePutBack[]>("application/json").Produces<WireRunSet>().ProducesProblem(412).ProducesProblem(422).WithName("put-back").WithTags("Run sets");

        runSets.MapPost("{id}/restore", (string id, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
            EditAsync(id, http, store, async _ =>
            {
                int revision = (await QuestionRoutes.ReadAsync<WireRestore>(http, cancel)).Body.Revision;
                return RunSetEdits.Restore(await store.OpenAsync(id, revision, cancel) ?? throw new NoSuchRunSetException(id, revision));
            }, cancel))
            .Accepts<WireRestore>("application/json").Produces<WireRunSet>().ProducesProblem(404).ProducesProblem(412).WithName("restore").WithTags("Run sets");

        runSets.MapGet("{id}/records", async (string id, int? offset, int? limit, int? revision, IRunSetStore store, CancellationToken cancel) =>
        {
            var content = await OpenAsync(store, id, revision, cancel);
            if (offset < 0 || limit is < 1 or > 100_000)
                throw new RequestException(400, "The request is wrong", "offset must be 0 or more, and limit between 1 and 100000.");
            return Results.Json(WireRecord.Of(content, offset ?? 0, limit ?? 1000), WireFormat.Json);
        }).Produces<IReadOnlyList<WireRecord>>().ProducesProblem(404).WithName("records").WithTags("Run sets");

        runSets.MapGet("{id}/ledger", async (string id, IRunSetStore store, CancellationToken cancel) =>
        {
            await FindAsync(store, id, null, cancel);
            return Results.Json(await store.LedgerAsync(id, cancel), WireFormat.Json);
        }).Produces<IReadOnlyList<Records.Ledger.LedgerEntry>>().ProducesProblem(404).WithName("ledger").WithTags("Run sets");

        runSets.MapGet("{id}/sources", async (string id, IRunSetStore store, CancellationToken cancel) =>
        {
            await FindAsync(store, id, null, cancel);
            return Results.Json(await store.SourcesAsync(id, cancel), WireFormat.Json);
        }).Produces<IReadOnlyList<SourceFile>>().ProducesProblem(404).WithName("sources").WithTags("Run sets");

        runSets.MapGet("{id}/sources/{number:int}", async (string id, int number, IRunSetStore store, CancellationToken cancel) =>
        {
            await FindAsync(store, id, null, cancel);
            var source = await store.OpenSourceAsync(id, number, cancel) ?? throw new RequestException(404, "Not found", $"The run set has no source file {number}.");
            return Results.File(source.Bytes, "application/octet-stream", source.File.FileName);
        }).Produces(200, contentType: "application/octet-stream").ProducesProblem(404).WithName("source").WithTags("Run sets");
    }

    public static async Task<RunSetInfo> FindAsync(IRunSetStore store, string id, int? revision, CancellationToken cancel) =>
        await store.FindAsync(id, revision, cancel) ?? throw new NoSuchRunSetException(id, revision);

    public static async Task<RevisionContent> OpenAsync(IRunSetStore store, string id, int? revision, CancellationToken cancel) =>
        await store.OpenAsync(id, revision, cancel) ?? throw new NoSuchRunSetException(id, revision);

    public static WriteOptions WriteOptionsOf(HttpContext http) =>
        new(http.Request.Headers["Idempotency-Key"].ToString() is { Length: > 0 } key ? key : null);

    /// <summary>The revision in If-Match, or null when the client does not insist.</summary>
    public static int? ExpectedRevision(HttpContext http)
    {
        string text = http.Request.Headers.IfMatch.ToString().Trim();
        if (text.Length == 0 || text == "*")
            return null;
        return int.TryParse(text.Trim('"'), out int revision) ? revision
            : throw new RequestException(400, "The request is wrong", $"If-Match must be a revision in quotes, for example \"3\", but is {text}.");
    }

    private static async Task<IResult> EditAsync(string id, HttpContext http, IRunSetStore store, Func<RevisionContent, Task<RevisionDraft>> edit, CancellationToken cancel)
    {
        var content = await OpenAsync(store, id, null, cancel);
        var write = WriteOptionsOf(http);
        int expected = ExpectedRevision(http) ?? content.Revision;
        // a repeated key is answered by the store before it looks at the revision
        if (expected != content.Revision && write.Idempotency is null)
            throw new StaleRevisionException(expected, content.Revision);
        var info = await store.CommitAsync(id, expected, await edit(content), write, cancel);
        return Results.Json(WireRunSet.Of(info), WireFormat.Json);
    }

    private static async Task<List<T>> ReadListAsync<T>(HttpContext http, CancellationToken cancel) =>
        await JsonSerializer.DeserializeAsync<List<T>>(http.Request.Body, WireFormat.Json, cancel)
        ?? throw new RequestException(400, "The request is wrong", "The body must be a JSON list.");
}

/// <summary>A run set as the interface shows it.</summary>
internal sealed record WireRunSet(
    string Id, string Name, string Note, int Revision, DateTimeOffset RevisedAt, int Records, int? Vehicles, int SetAside, IReadOnlyList<WireColumn> Columns, IReadOnlyList<Finding> Findings, int Sources)
{
    public static WireRunSet Of(RunSetInfo info) =>
        new(info.Id, info.Name, info.Note, info.Revision, info.RevisedAt, info.Records, info.Vehicles, info.SetAside,
            [.. info.Columns.Select(c => new WireColumn(c.Definition.Name, c.Definition.Kind, c.Definition.Unit, c.Definition.Role, c.Known, c.Missing, c.Filled, c.Levels, c.Definition.MissingCodes))],
            info.Findings, info.Sources);
}

/// <summary>A column as the interface shows it.</summary>
internal sealed record WireColumn(
    string Name, ColumnKind Kind, string? Unit, ColumnRole Role, int Known, int Missing, int Filled, IReadOnlyList<string>? Levels, IReadOnlyList<string> MissingCodes);

/// <summary>A correction as it is sent.</summary>
internal sealed record WireCorrection(int Record, string Column, JsonElement Value, string Reason)
{
    public Correction Correction() => new(Record, Column, Value.ValueKind switch
    {
        JsonValueKind.Number => Value.GetDouble(),
        JsonValueKind.String => Value.GetString(),
        JsonValueKind.True => true,
        JsonValueKind.False => false,
        _ => null,
    }, Reason);
}

internal sealed record WirePutBack(int Record, string? Column);

internal sealed record WireRestore(int Revision);

/// <summary>One record with its values, and the states of cells that are not simply measured.</summary>
internal sealed record WireRecord(int Record, IReadOnlyDictionary<string, object?> Values, IReadOnlyDictionary<string, CellState> States)
{
    [JsonIgnore(Condition = JsonIgnoreCondition.WhenWritingNull)]
    public string? SetAside { get; init; }

    public static List<WireRecord> Of(RevisionContent content, int offset, int limit)
    {
        var columns = content.Definitions.Select(d => content.Column(d.Name)).ToArray();
        var records = new List<WireRecord>();
        for (int row = offset; row < content.Count && row - offset < limit; row++)
        {
            var values = new Dictionary<string, object?>(columns.Length);
            var states = new Dictionary<string, CellState>();
            int record = content.Numbers[row];
            bool whole = content.SetAside.TryGetValue(record, out string? reason);
            foreach (var column in columns)
            {
                values[column.Name] = column.ValueAt(row) is DateTime ? column.TextAt(row) : column.ValueAt(row);
                var state = whole && !content.MarksOf(column.Name).ContainsKey(record) ? CellState.SetAside : content.StateOf(column, row);
                if (state != CellState.Measured)
                    states[column.Name] = state;
            }
            records.Add(new WireRecord(record, values, states) { SetAside = reason });
        }
        return records;
    }
}
