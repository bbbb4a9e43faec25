using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Analysis.Work;

/// <summary>
/// Answers questions off the caller's thread: opens the revision, bounds how many procedures run at once, and remembers the
/// latest answers, since an answer is a pure function of question and revision. Two callers with the same question at the same
/// time share one computation, which is stopped only when all of them have gone. Safe to use from any thread.
/// </summary>
public sealed class Answerer(IRunSetStore store) : IDisposable
{
    private const int Remembered = 200;
    private readonly SemaphoreSlim _slots = new(Math.Max(2, Environment.ProcessorCount));
    private readonly Lock _gate = new();
    private readonly Dictionary<string, Entry> _entries = new(StringComparer.Ordinal);
    private readonly LinkedList<string> _order = new();

    /// <summary>Answers a question about a run set.</summary>
    /// <exception cref="NoSuchRunSetException">There is no such run set or revision.</exception>
    /// <exception cref="QuestionException">The question is wrong.</exception>
    /// <exception cref="CannotAnswerException">The data cannot carry an answer.</exception>
    public async Task<TAnswer> AskAsync<TAnswer>(string runSetId, Question<TAnswer> question, IProgress<WorkProgress>? progress = null, CancellationToken cancel = default)
        where TAnswer : Answer
    {
        var content = await store.OpenAsync(runSetId, question.Revision, cancel).ConfigureAwait(false) ?? throw new NoSuchRunSetException(runSetId, question.Revision);
        return await AskAsync(content, question, progress, cancel).ConfigureAwait(false);
    }

    /// <summary>Answers a question about a revision at hand.</summary>
    public async Task<TAnswer> AskAsync<TAnswer>(RevisionContent content, Question<TAnswer> question, IProgress<WorkProgress>? progress = null, CancellationToken cancel = default)
        where TAnswer : Answer
    {
        string key = content.RunSetId + "/" + WireFormat.Fingerprint(content.Fingerprint, question);
        Entry entry;
        lock (_gate)
        {
            if (!_entries.TryGetValue(key, out entry!) || entry.Stop.IsCancellationRequested || entry.Work.IsFaulted)
            {
                if (entry is not null)
                    _order.Remove(key);
                entry = new Entry();
                var own = entry;
                entry.Work = Task.Run(() => RunAsync(content, question, own));
                _entries[key] = entry;
                _order.AddLast(key);
                Forget();
            }
            entry.Waiting++;
            if (progress is not null)
                entry.Listeners.Add(progress);
        }
        try
        {
            return (TAnswer)await entry.Work.WaitAsync(cancel).ConfigureAwait(false);
        }
        finally
        {
            lock (_gate)
            {
                entry.Waiting--;
                if (progress is not null)
                    entry.Listeners.Remove(progress);
                if (entry.Waiting == 0 && !entry.Work.IsCompleted)
                    entry.Stop.Cancel();
            }
        }
    }

    public void Dispose()
    {
        lock (_gate)
            foreach (var entry in _entries.Values)
                entry.Stop.Cancel();
        _slots.Dispose();
    }

    private async Task<Answer> RunAsync<TAnswer>(RevisionContent content, Question<TAnswer> question, Entry entry)
        where TAnswer : Answer
    {
        await _slots.WaitAsync(entry.Stop.Token).ConfigureAwait(false);
        try
        {
            entry.Stop.Token.ThrowIfCancellationRequested();
            return question.Ask(content, new WorkContext(entry.Stop.Token, new Fan(this, entry)));
        }
        finally
        {
            _slots.Release();
        }
    }

    private void Forget()
    {
        for (var node = _order.First; node is not null && _order.Count > Remembered;)
        {
            var next = node.Next;
            if (_entries[node.Value].Work.IsCompleted)
            {
                _entries.Remove(node.Value);
                _order.Remove(node);
            }
            node = next;
        }
    }

    private sealed class Entry
    {
        public CancellationTokenSource Stop { get; } = new();

        public Task<Answer> Work { get; set; } = null!;

        public int Waiting { get; set; }

        public List<IProgress<WorkProgress>> Listeners { get; } = [];

        public long LastSaid { get; set; }
    }

    /// <summary>Passes progress to everybody who waits, at most ten times a second.</summary>
    private sealed class Fan(Answerer owner, Entry entry) : IProgress<WorkProgress>
    {
        public void Report(WorkProgress value)
        {
            IProgress<WorkProgress>[] listeners;
            lock (owner._gate)
            {
                long now = Environment.TickCount64;
                if (now - entry.LastSaid < 100)
                    return;
                entry.LastSaid = now;
                listeners = [.. entry.Listeners];
            }
            foreach (var listener in listeners)
                listener.Report(value);
        }
    }
}

/// <summary>A run set or revision that does not exist.</summary>
public sealed class NoSuchRunSetException(string id, int? revision = null)
    : Exception(revision is null ? $"There is no run set '{id}'. It may have been deleted; the list of run sets shows what there is." : $"Run set '{id}' has no revision {revision}.");
