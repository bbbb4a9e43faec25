using System.Collections.Concurrent;
using Gaugeyard.Analysis.Work;

namespace Gaugeyard.Portal.Api;

/// <summary>Work that was asked for over HTTP and is fetched later. Jobs are forgotten an hour after they ended.</summary>
internal sealed class JobBoard(TimeProvider clock) : IDisposable
{
    private static readonly TimeSpan Kept = TimeSpan.FromHours(1);
    private readonly ConcurrentDictionary<string, Job> _jobs = new(StringComparer.Ordinal);

    public Job Start(Func<IProgress<WorkProgress>?, CancellationToken, Task<object>> work)
    {
        foreach (var (id, old) in _jobs)
            if (old.EndedAt is { } ended && clock.GetUtcNow() - ended > Kept && _jobs.TryRemove(id, out _))
                old.Dispose();
        var job = new Job(clock, work);
        _jobs[job.Id] = job;
        return job;
    }

    public Job? Find(string id) => _jobs.GetValueOrDefault(id);

    public void Dispose()
    {
        foreach (var job in _jobs.Values)
            job.Dispose();
    }
}

/// <summary>One piece of work, and how far it is.</summary>
internal sealed class Job : IProgress<WorkProgress>, IDisposable
{
    private readonly CancellationTokenSource _stop = new();
    private volatile WorkProgress _progress = new(0, "waiting for its turn");

    public Job(TimeProvider clock, Func<IProgress<WorkProgress>?, CancellationToken, Task<object>> work)
    {
        Work = Task.Run(() => work(this, _stop.Token));
        Work.ContinueWith(_ => EndedAt = clock.GetUtcNow(), TaskScheduler.Default);
    }

    public string Id { get; } = Guid.NewGuid().ToString("N");

    public Task<object> Work { get; }

    public DateTimeOffset? EndedAt { get; private set; }

    public void Report(WorkProgress value) => _progress = value;

    public void Stop() => _stop.Cancel();

    public JobState State() => new(Id, Work.IsCanceled ? "stopped" : Work.IsFaulted ? "failed" : Work.IsCompleted ? "done" : "working", Work.IsCompletedSuccessfully ? 1 : _progress.Fraction, _progress.Says);

    public void Dispose()
    {
        _stop.Cancel();
        _stop.Dispose();
    }
}

/// <summary>What a client sees of a job that is not done.</summary>
internal sealed record JobState(string Id, string State, double Fraction, string Says);

internal static class JobRoutes
{
    public static void MapJobs(this RouteGroupBuilder api)
    {
        api.MapGet("jobs/{id}", async (string id, JobBoard jobs) =>
        {
            var job = jobs.Find(id) ?? throw new RequestException(404, "Not found", "There is no such job; finished ones are kept for an hour.");
            // a finished job gives its answer, or throws what went wrong
            return job.Work.IsCompleted && !job.Work.IsCanceled ? Results.Json(await job.Work, WireFormat.Json) : Results.Json(job.State(), WireFormat.Json);
        }).Produces<JobState>().ProducesProblem(404).WithName("job").WithTags("Jobs");
        api.MapDelete("jobs/{id}", (string id, JobBoard jobs) =>
        {
            var job = jobs.Find(id) ?? throw new RequestException(404, "Not found", "There is no such job; finished ones are kept for an hour.");
            job.Stop();
            return Results.NoContent();
        }).Produces(204).ProducesProblem(404).WithName("stop-job").WithTags("Jobs");
    }
}
