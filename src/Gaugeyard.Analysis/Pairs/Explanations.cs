using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Records.Columns;
using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>
/// What stand-outs have in common: each value of each category by Fisher's exact test, each number by the rank-sum test, all adjusted together by Holm.
/// An attribute that never changes within a vehicle is counted by vehicle, since its runs are not independent.
/// </summary>
internal static class Explanations
{
    /// <summary>A category with more values than this explains nothing.</summary>
    private const int MostLevels = 60;

    /// <summary>Fewer stand-outs than this share nothing that could not be chance.</summary>
    private const int Fewest = 3;

    /// <summary>A shift below half a usual spread is no explanation, however sure.</summary>
    private const double LeastShift = 0.5;

    public static List<StandoutExplanation> Of(Sample sample, bool[] off, IReadOnlyCollection<string> passOver, CancellationToken cancel)
    {
        var found = new List<(StandoutExplanation E, double P)>();
        if (off.Count(x => x) < Fewest)
            return [];
        bool byVehicle = sample.VehiclesRepeat;
        foreach (var definition in sample.Content.Definitions)
        {
            cancel.ThrowIfCancellationRequested();
            if (passOver.Contains(definition.Name) || definition.Role is ColumnRole.Vehicle or ColumnRole.RunName or ColumnRole.Note)
                continue;
            if (definition.Kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.YesNo)
            {
                var (codes, levels) = sample.Category(definition.Name);
                if (levels.Length is < 2 or > MostLevels)
                    continue;
                var (c, o, counted) = Units(codes, off, sample, byVehicle, static (a, b) => a == b);
                Levels(definition.Name, c, o, levels, counted, found);
            }
            else if (definition.Kind == ColumnKind.Number)
            {
                double[] values = sample.Number(definition.Name);
                var (v, o, counted) = Units(values, off, sample, byVehicle, static (a, b) => a.Equals(b));
                Number(definition, v, o, counted, found);
            }
        }
        double[] adjusted = AdjustedP.Holm([.. found.Select(f => f.P)]);
        return [.. found.Select((f, i) => f.E with { P = adjusted[i] })
            .Where(e => e.P < 0.05 && (e.ShareIn is null ? Math.Abs(e.Shift!.Value) >= LeastShift : e.ShareIn > e.ShareOut))
            // what was counted by vehicle can be trusted more than what was counted by run
            .OrderBy(e => e.Counted == "runs").ThenBy(e => e.P).ThenByDescending(e => Math.Abs(e.Shift ?? 0))];
    }

    private static void Levels(string column, int[] codes, bool[] off, string[] levels, string counted, List<(StandoutExplanation, double)> found)
    {
        var inside = new int[levels.Length];
        var outside = new int[levels.Length];
        for (int i = 0; i < codes.Length; i++)
            if (codes[i] >= 0)
                (off[i] ? inside : outside)[codes[i]]++;
        int allIn = inside.Sum(), allOut = outside.Sum();
        if (allIn < Fewest || allOut == 0)
            return;
        for (int k = 0; k < levels.Length; k++)
        {
            double shareIn = (double)inside[k] / allIn, shareOut = (double)outside[k] / allOut;
            double p = FisherExact.TwoSided(inside[k], allIn - inside[k], outside[k], allOut - outside[k]);
            string what = Phrase(column, levels[k]);
            found.Add((new StandoutExplanation($"{inside[k]} of the {allIn} {counted} that stand off have {what}, but {Share(shareOut)} of the others.", column, levels[k], shareIn, shareOut, p)
            {
                Counted = counted,
                CountIn = inside[k],
                Cause = $"{Say.Sentence(Say.Number(inside[k], 0))} of the {Say.Count(allIn, counted[..^1], counted)} concerned {(inside[k] == 1 ? "has" : "have")} {what}, against {Share(shareOut)} of the others.",
            }, p));
        }
    }

    private static void Number(ColumnDefinition column, double[] values, bool[] off, string counted, List<(StandoutExplanation, double)> found)
    {
        double[] inside = [.. values.Where((v, i) => off[i] && !double.IsNaN(v))], outside = [.. values.Where((v, i) => !off[i] && !double.IsNaN(v))];
        if (inside.Length < Fewest || outside.Length < Fewest)
            return;
        double a = RobustScale.Median(inside), b = RobustScale.Median(outside), scale = RobustScale.Mad(outside, b);
        if (!(scale > 0))
            return;
        double p = RankSum.TwoSided(inside, outside);
        int decimals = Say.DecimalsFor(scale);
        string where = a < b ? "lower" : "higher";
        string text = $"{column.Name} lies {Say.With(Math.Abs(a - b), decimals, column.Unit)} {where} among the {counted} that stand off (median {Say.Number(a, decimals)} against {Say.Number(b, decimals)}; {Say.Number(Math.Abs(a - b) / scale, 1)} usual spreads).";
        found.Add((new StandoutExplanation(text, column.Name, null, null, null, p)
        {
            Shift = (a - b) / scale,
            Counted = counted,
            Cause = $"{column.Name} is {where} among them: {Say.With(a, decimals, column.Unit)} against {Say.With(b, decimals, column.Unit)} (medians).",
        }, p));
    }

    /// <summary>One entry per vehicle where the attribute never changes within one, else one per record.</summary>
    private static (T[] Values, bool[] Off, string Counted) Units<T>(T[] values, bool[] off, Sample sample, bool byVehicle, Func<T, T, bool> same)
    {
        if (!byVehicle)
            return (values, off, "records");
        var first = new T[sample.VehicleCount!.Value];
        var seen = new bool[first.Length];
        var vehicleOff = new bool[first.Length];
        for (int i = 0; i < values.Length; i++)
        {
            int v = sample.VehicleOf![i];
            if (!seen[v])
                (first[v], seen[v]) = (values[i], true);
            else if (!same(first[v], values[i]))
                return (values, off, "runs");
            vehicleOff[v] |= off[i];
        }
        return (first, vehicleOff, "vehicles");
    }

    private static string Phrase(string column, string level) => $"{column} {level}";

    private static string Share(double share) => share == 0 ? "none" : share < 0.01 ? "under 1\u00a0%" : Say.Percent(share);
}
