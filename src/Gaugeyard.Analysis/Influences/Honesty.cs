using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Analysis.Influences;

/// <summary>
/// What a selection is worth: the whole procedure cross-validated by vehicle, and how often each term is chosen when vehicles
/// are drawn anew (Heinze, Wallisch and Dunkler 2018, Biometrical J. 60:431-449).
/// </summary>
internal static class Honesty
{
    private const uint FoldTask = 0x7E01, DrawTask = 0x7E02;

    public static HonestyFigures Of(Selection selection, int resamples, ulong seed, WorkContext work)
    {
        int[] vehicles = [.. selection.Vehicles.Distinct().Order()];
        int folds = Math.Min(10, vehicles.Length), repeats = selection.Y.Length <= 3000 ? 3 : 1;
        double? own = null, full = null;
        if (folds >= 3)
        {
            var chosenErrors = new List<double>();
            var fullErrors = new List<double>();
            int[] all = [.. Enumerable.Range(0, selection.TermCount)];
            var gate = new Lock();
            int done = 0;
            Parallel.For(0, repeats * folds, Options(work), job =>
            {
                int repeat = job / folds, fold = job % folds;
                var part = Folds(vehicles, folds, seed, repeat);
                int[] train = [.. Rows(i => part[selection.Vehicles[i]] != fold)], test = [.. Rows(i => part[selection.Vehicles[i]] == fold)];
                var path = selection.Choose(selection.Data.At(train), [.. train.Select(i => selection.Y[i])], [.. train.Select(i => selection.Vehicles[i])], work.Cancel);
                double[] a = selection.HeldOutErrors(path.Chosen, train, test), b = selection.HeldOutErrors(all, train, test);
                lock (gate)
                {
                    chosenErrors.AddRange(a.Where(e => !double.IsNaN(e)));
                    fullErrors.AddRange(b.Where(e => !double.IsNaN(e)));
                    work.Say(0.05 + 0.4 * ++done / (repeats * folds), "trying the choice on vehicles left out");
                }
            });
            // sorted sums: the order in which threads finish must not show
            own = Root(chosenErrors);
            full = Root(fullErrors);
        }

        var counts = new int[selection.TermCount];
        if (resamples > 0 && vehicles.Length >= 3)
        {
            var rowsOf = Enumerable.Range(0, selection.Y.Length).GroupBy(i => selection.Vehicles[i]).ToDictionary(g => g.Key, g => g.ToArray());
            int done = 0;
            Parallel.For(0, resamples, Options(work), b =>
            {
                var random = new RandomStream(seed, DrawTask, (ulong)b);
                var rows = new List<int>();
                var drawn = new List<int>();
                for (int k = 0; k < vehicles.Length; k++)
                    foreach (int i in rowsOf[vehicles[random.NextInt(vehicles.Length)]])
                    {
                        rows.Add(i);
                        // a vehicle drawn twice is two vehicles
                        drawn.Add(k);
                    }
                double[] y = [.. rows.Select(i => selection.Y[i])];
                if (y.All(v => v == y[0]))
                    return;
                var path = selection.Choose(selection.Data.At([.. rows]), y, [.. drawn], work.Cancel);
                foreach (int t in path.Chosen)
                    Interlocked.Increment(ref counts[t]);
                work.Say(0.45 + 0.5 * Interlocked.Increment(ref done) / resamples, "drawing the vehicles anew");
            });
        }
        return new HonestyFigures(own, full, [.. counts.Select((c, t) => new InclusionShare(selection.LabelOf(t), resamples == 0 ? double.NaN : (double)c / resamples))]) { Resamples = resamples, Folds = folds };

        IEnumerable<int> Rows(Func<int, bool> take) => Enumerable.Range(0, selection.Y.Length).Where(take);
    }

    /// <summary>Part of each vehicle: vehicles in order, shuffled, dealt out in turn.</summary>
    public static Dictionary<int, int> Folds(int[] vehicles, int folds, ulong seed, int repeat)
    {
        int[] shuffled = (int[])vehicles.Clone();
        new RandomStream(seed, FoldTask, (ulong)repeat).Shuffle<int>(shuffled);
        return shuffled.Select((v, k) => (v, k)).ToDictionary(x => x.v, x => x.k % folds);
    }

    private static double? Root(List<double> errors)
    {
        if (errors.Count == 0)
            return null;
        double[] sorted = [.. errors.Order()];
        return Math.Sqrt(Sums.Mean(sorted));
    }

    private static ParallelOptions Options(WorkContext work) => new() { CancellationToken = work.Cancel, MaxDegreeOfParallelism = Environment.ProcessorCount };
}
