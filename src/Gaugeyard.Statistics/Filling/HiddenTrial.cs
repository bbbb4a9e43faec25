using Gaugeyard.Statistics.Describing;

namespace Gaugeyard.Statistics.Filling;

/// <summary>One hidden reading: the truth, its estimate and interval; NaN estimate where it was refused.</summary>
public readonly record struct HiddenReading(int Row, double Truth, double Estimate, double Low, double High)
{
    public bool Refused => double.IsNaN(Estimate);

    public bool Inside => Low <= Truth && Truth <= High;
}

/// <summary>
/// Hidden-reading trial: whole vehicles are hidden in turn, a way is trained on the others, and its estimates and intervals are
/// compared with what was hidden. The intervals are built without the hidden vehicles too, so that their coverage is honest.
/// </summary>
public static class HiddenTrial
{
    /// <summary>Tries one way.</summary>
    /// <param name="rows">Records whose reading and predictors are known.</param>
    /// <param name="folds">Parts of whole vehicles that are hidden in turn.</param>
    public static IReadOnlyList<HiddenReading> Of(IFillWay way, FillData data, int[] rows, int folds, double confidence, ulong seed, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        int[] vehicles = [.. rows.Select(i => data.Vehicles[i]).Distinct().Order()];
        int k = Math.Min(folds, vehicles.Length);
        var part = CrossConformal.Parts(vehicles, k, seed + 1);
        var hidden = new HiddenReading[rows.Length];
        int done = 0;
        for (int f = 0; f < k; f++)
        {
            cancel.ThrowIfCancellationRequested();
            int[] train = [.. rows.Where(i => part[data.Vehicles[i]] != f)];
            var range = TestedRange.Of(data, train, way.Uses(data, train));
            var conformal = CrossConformal.Of(way, data, train, 10, confidence, seed, null, cancel);
            Parallel.For(0, rows.Length, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, r =>
            {
                int i = rows[r];
                if (part[data.Vehicles[i]] != f)
                    return;
                if (range.Refusal(i) is not null)
                {
                    hidden[r] = new HiddenReading(i, data.Y[i], double.NaN, double.NaN, double.NaN);
                    return;
                }
                var x = conformal.At(i);
                hidden[r] = new HiddenReading(i, data.Y[i], x.Value, x.Low, x.High);
            });
            progress?.Report((double)++done / k);
        }
        return hidden;
    }
}
