namespace Gaugeyard.Analysis.Work;

/// <summary>How far a piece of work has come.</summary>
/// <param name="Fraction">0 to 1.</param>
/// <param name="Says">What is being computed, in words.</param>
public sealed record WorkProgress(double Fraction, string Says);

/// <summary>What a procedure gets beside its data: the wish to stop, and somewhere to say how far it is.</summary>
public sealed class WorkContext(CancellationToken cancel, IProgress<WorkProgress>? progress = null)
{
    /// <summary>No stopping, no progress.</summary>
    public static WorkContext None { get; } = new(CancellationToken.None);

    /// <summary>To be checked at each outer step.</summary>
    public CancellationToken Cancel { get; } = cancel;

    /// <summary>Says how far the work is; throttling is the receiver's business.</summary>
    public void Say(double fraction, string says) => progress?.Report(new WorkProgress(fraction, says));

    /// <summary>A progress sink for one stage that covers a part of the whole.</summary>
    public IProgress<double> Stage(double from, double to, string says) => new StageProgress(this, from, to, says);

    private sealed class StageProgress(WorkContext work, double from, double to, string says) : IProgress<double>
    {
        public void Report(double value) => work.Say(from + (to - from) * value, says);
    }
}
