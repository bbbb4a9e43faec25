using System.Text.Json;
using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;
using Microsoft.AspNetCore.Diagnostics;
using Microsoft.AspNetCore.Mvc;

namespace Gaugeyard.Portal.Api;

/// <summary>Turns what went wrong into RFC 9457 problem details whose detail is a sentence that says what to do.</summary>
internal sealed class Problems(ILogger<Problems> log) : IExceptionHandler
{
    public async ValueTask<bool> TryHandleAsync(HttpContext context, Exception exception, CancellationToken cancellationToken)
    {
        // the handler middleware has put its own page in the request's path by now
        PathString asked = context.Features.Get<IExceptionHandlerPathFeature>()?.Path ?? context.Request.Path;
        if (!asked.StartsWithSegments("/api") || context.Response.HasStarted)
            return false;
        if (exception is OperationCanceledException && context.RequestAborted.IsCancellationRequested)
            return true;
        var problem = Of(exception);
        if (problem.Status == 500)
            log.LogError(exception, "Unexpected failure at {Path}", asked);
        await WriteAsync(context, problem).ConfigureAwait(false);
        return true;
    }

    /// <summary>The problem that describes an exception.</summary>
    public static ProblemDetails Of(Exception exception)
    {
        var (status, title) = exception switch
        {
            QuestionException => (400, "The question is wrong"),
            CannotAnswerException => (422, "These data cannot carry an answer"),
            NoSuchRunSetException => (404, "Not found"),
            StaleRevisionException => (412, "Somebody else changed the run set"),
            EditException => (422, "The change cannot be made"),
            Exchange.UnreadableFileException => (422, "The file cannot be read"),
            RequestException r => (r.Status, r.Title),
            BadHttpRequestException b => (b.StatusCode, "The request is wrong"),
            JsonException => (400, "The request is not the JSON expected"),
            OperationCanceledException => (409, "The work was stopped"),
            _ => (500, "Something failed inside the portal"),
        };
        var problem = new ProblemDetails
        {
            Status = status,
            Title = title,
            Detail = exception switch
            {
                JsonException j => $"{j.Message.Split(" Path:")[0].TrimEnd('.')}{(string.IsNullOrEmpty(j.Path) || j.Path == "$" ? "" : $" (at {j.Path})")}. Send JSON as the interface description says.",
                OperationCanceledException => "The work was stopped before it was done; nothing was changed.",
                _ when status == 500 => "This is a fault of the portal, not of your request. Nothing was half-written; the portal's log says more.",
                _ => exception.Message,
            },
        };
        if (exception is EditException { Findings.Count: > 0 } edit)
            problem.Extensions["findings"] = edit.Findings;
        return problem;
    }

    public static Task WriteAsync(HttpContext context, ProblemDetails problem)
    {
        context.Response.StatusCode = problem.Status ?? 500;
        return context.Response.WriteAsJsonAsync(problem, WireFormat.Json, "application/problem+json", context.RequestAborted);
    }
}

/// <summary>A request that is wrong in itself.</summary>
internal sealed class RequestException(int status, string title, string detail) : Exception(detail)
{
    public int Status { get; } = status;

    public string Title { get; } = title;
}
