using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Work;

namespace Gaugeyard.Portal.Components;

/// <summary>How far a page's question is.</summary>
public interface IAsking
{
    bool Working { get; }

    WorkProgress? Progress { get; }

    /// <summary>Why the data cannot carry an answer, or what is wrong with the question.</summary>
    string? Refusal { get; }

    /// <summary>What failed.</summary>
    string? Fault { get; }

    void Stop();
}

/// <summary>
/// One question of a page: asks off the circuit, cancels what a newer question supersedes, keeps the last answer on view while
/// the next one is computed.
/// </summary>
public sealed class Asking<TAnswer>(Answerer answerer, Action changed) : IAsking, IProgress<WorkProgress>, IDisposable
    where TAnswer : Answer
{
    private CancellationTokenSource? _stop;
    private string? _askedOf;

    /// <summary>The last answer; null before the first and after a refusal.</summary>
    public TAnswer? Answer { get; private set; }

    public bool Working { get; private set; }

    public WorkProgress? Progress { get; private set; }

    public string? Refusal { get; private set; }

    public string? Fault { get; private set; }

    /// <summary>Asks, unless the very same question was asked last.</summary>
    /// <param name="revision">Revision of the run set, so that a new one is asked again.</param>
    public async Task AskAsync(string runSetId, Question<TAnswer> question, int revision)
    {
        string key = $"{runSetId}/{revision}/{WireFormat.Fingerprint("", question)}";
        if (key == _askedOf)
            return;
        _stop?.Cancel();
        var stop = _stop = new CancellationTokenSource();
        (_askedOf, Working, Progress, Refusal, Fault) = (key, true, null, null, null);
        changed();
        try
        {
            var answer = await answerer.AskAsync(runSetId, question, this, stop.Token);
            if (ReferenceEquals(stop, _stop))
                Answer = answer;
        }
        catch (Exception e) when (e is CannotAnswerException or QuestionException or NoSuchRunSetException)
        {
            if (ReferenceEquals(stop, _stop))
                (Answer, Refusal) = (null, e.Message);
        }
        catch (OperationCanceledException)
        {
            if (ReferenceEquals(stop, _stop))
                (Fault, _askedOf) = ("Stopped. Change a setting to ask again.", null);
        }
        catch (Exception) when (ReferenceEquals(stop, _stop))
        {
            (Fault, _askedOf) = ("This could not be computed because of a fault inside the portal. What was stored is safe; try other settings.", null);
        }
        if (ReferenceEquals(stop, _stop))
        {
            Working = false;
            changed();
        }
    }

    public void Report(WorkProgress value)
    {
        Progress = value;
        changed();
    }

    public void Stop() => _stop?.Cancel();

    public void Dispose() => _stop?.Cancel();
}
