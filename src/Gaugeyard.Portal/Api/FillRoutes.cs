using Gaugeyard.Analysis.Fill;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Api;

/// <summary>Trying, planning and writing fills.</summary>
internal static class FillRoutes
{
    public static void MapFill(this RouteGroupBuilder runSets)
    {
        runSets.MapQuestion<FillTrialQuestion, FillTrialAnswer>("fill-trial");
        runSets.MapQuestion<FillPlanQuestion, FillPlanAnswer>("fill-plan");
        runSets.MapPost("{id}/fill", async (string id, HttpContext http, IRunSetStore store, Answerer answerer, JobBoard jobs, CancellationToken cancel) =>
        {
            var content = await RunSetRoutes.OpenAsync(store, id, null, cancel);
            var (order, _) = await QuestionRoutes.ReadAsync<FillOrder>(http, cancel);
            var write = RunSetRoutes.WriteOptionsOf(http);
            int expected = RunSetRoutes.ExpectedRevision(http) ?? order.Revision ?? content.Revision;
            if (expected != content.Revision && write.Idempotency is null)
                throw new StaleRevisionException(expected, content.Revision);
            // a repeated key must plan from the revision the first one saw
            if (expected != content.Revision)
                content = await RunSetRoutes.OpenAsync(store, id, expected, cancel);
            async Task<object> Work(IProgress<WorkProgress>? progress, CancellationToken stop)
            {
                var question = order.Question();
                var plan = await answerer.AskAsync(content, question, progress, stop);
                var info = await store.CommitAsync(id, expected, FillAcceptance.Draft(content, question, plan, order.Note ?? ""), write, stop);
                return new FillDone(info.Revision, plan.Filled, plan.Refused) { Notes = plan.Notes };
            }
            if (QuestionRoutes.WantsJob(http))
            {
                var job = jobs.Start(Work);
                return Results.Accepted($"/api/v1/jobs/{job.Id}", job.State());
            }
            return Results.Json(await Work(null, cancel), WireFormat.Json, statusCode: 201);
        }).Accepts<FillOrder>("application/json").Produces<FillDone>(201).ProducesProblem(400).ProducesProblem(412).ProducesProblem(422).WithName("fill").WithTags("Fill");
    }
}

/// <summary>A fill to be written.</summary>
internal sealed record FillOrder
{
    public int? Revision { get; init; }

    public string Reading { get; init; } = "";

    public FillBy Way { get; init; } = FillBy.StepwiseRegression;

    public IReadOnlyList<string> Predictors { get; init; } = [];

    public string? Note { get; init; }

    public ulong Seed { get; init; } = 1;

    public double Confidence { get; init; } = 0.95;

    public Analysis.VehicleUse Vehicles { get; init; }

    public Analysis.CountBy? Count { get; init; }

    public IReadOnlyList<Records.Slices.SliceCondition> Slice { get; init; } = [];

    public FillPlanQuestion Question() => new() { Reading = Reading, Way = Way, Predictors = Predictors, Seed = Seed, Confidence = Confidence, Vehicles = Vehicles, Count = Count, Slice = Slice };
}

/// <summary>What was written.</summary>
internal sealed record FillDone(int Revision, IReadOnlyList<PlannedCell> Filled, IReadOnlyList<RefusedCell> Refused)
{
    public IReadOnlyList<string> Notes { get; init; } = [];
}
