using Gaugeyard.Analysis.Wording;

namespace Gaugeyard.Analysis.Curves;

/// <summary>The finding about a curve as a sentence.</summary>
internal static class CurveHeadline
{
    /// <summary>Change from the first point within the tested range to the last.</summary>
    public static CurveChange? Change(CurveResult result)
    {
        if (result.Points.Count == 0 || result.Points[0].At.Count != 1)
            return null;
        int[] known = Known(result);
        return known.Length < 2 ? null : Between(result, known[0], known[^1]);
    }

    public static string Of(CurveQuestion question, string? unit, string? xUnit, CurveData data, CurveResult result)
    {
        string reading = Say.Sentence(question.Reading), against = question.Against[0];
        if (question.Against.Count > 1)
            return result.Smoothing.S is { } s
                ? $"{reading} follows {Say.List(question.Against)} with a typical error of {Say.With(s, Say.DecimalsFor(s), unit)} about the surface."
                : $"{reading} follows {Say.List(question.Against)}; the curve runs along {against} with the others at their medians.";
        int[] known = Known(result);
        if (known.Length < 2)
            return $"No point asked for lies in the tested range of {against}, {Say.Range(data.Low[0], data.High[0], Say.DecimalsFor(data.High[0] - data.Low[0]))}{Say.Unit(xUnit)}.";
        int first = known[0], last = known[^1], highest = known.MaxBy(g => Value(result, g)), lowest = known.MinBy(g => Value(result, g));
        double sweep = Value(result, highest) - Value(result, lowest);
        double noise = known.Select(g => result.Points[g].Se ?? double.NaN).Where(double.IsFinite).DefaultIfEmpty(sweep / 20).Average();
        int decimals = Math.Max(0, Say.DecimalsFor(Math.Max(noise, sweep * 1e-6)) - 1), xDecimals = Math.Max(0, Say.DecimalsFor((Place(result, last) - Place(result, first)) / 10) - 1);
        string Where(int a, int b) => $"from {Say.Number(Place(result, a), xDecimals)} to {Say.With(Place(result, b), xDecimals, xUnit)}";
        string Leg(int a, int b)
        {
            var change = Between(result, a, b);
            string interval = change is { Low: { } low, High: { } high } ? $" ({Say.Range(change.Difference < 0 ? -high : low, change.Difference < 0 ? -low : high, decimals)})" : "";
            return $"{(change.Difference < 0 ? "falls" : "rises")} {Say.With(Math.Abs(change.Difference), decimals, unit)} {Where(a, b)}{interval}";
        }
        string line = result.StraightLine?.Misses switch { true => "; a straight line misses this", false => "; a straight line does about as well on unseen " + data.UnitWord, null => "" };
        if (sweep < 2 * noise || sweep == 0)
            return $"{reading} does not change visibly with {against} {Where(first, last)}.";
        // an inner extreme counts as a turn when both legs are a fair part of the sweep
        foreach (int turn in new[] { lowest, highest }.OrderByDescending(g => Math.Min(Math.Abs(Value(result, g) - Value(result, first)), Math.Abs(Value(result, g) - Value(result, last)))))
            if (Math.Min(Math.Abs(Value(result, turn) - Value(result, first)), Math.Abs(Value(result, turn) - Value(result, last))) > Math.Max(0.2 * sweep, 2 * noise))
                return $"{reading} {Leg(first, turn)}, then {Leg(turn, last)}{line}.";
        if (Between(result, first, last) is { Low: { } from, High: { } to } whole && from < 0 && to > 0)
            return $"{reading} {(whole.Difference < 0 ? "falls" : "rises")} about {Say.With(Math.Abs(whole.Difference), decimals, unit)} {Where(first, last)}, but {Say.Count(data.UnitCount, data.UnitWord[..^1])} cannot tell this from no change (between {Say.With(from, decimals, unit)} and {(to > 0 ? "+" : "")}{Say.With(to, decimals, unit)}).";
        string only = Level(result, known, sweep, noise) is { } level ? $"{Leg(first, level)}, then stays level" : Leg(first, last);
        return $"{reading} {only}{line}.";
    }

    // where a curve that moves at first has done nine tenths of it before two thirds of the range
    private static int? Level(CurveResult result, int[] known, double sweep, double noise)
    {
        int last = known[^1];
        double end = Value(result, last);
        int from = Array.FindIndex(known, g => known.Where(k => Place(result, k) >= Place(result, g)).All(k => Math.Abs(Value(result, k) - end) < Math.Max(0.08 * sweep, noise)));
        if (from <= 0)
            return null;
        double share = (Place(result, known[from]) - Place(result, known[0])) / (Place(result, last) - Place(result, known[0]));
        return share < 0.67 ? known[from] : null;
    }

    private static CurveChange Between(CurveResult result, int a, int b)
    {
        var interval = result.Difference(a, b);
        return new CurveChange(Place(result, a), Place(result, b), Value(result, b) - Value(result, a), UnseenParts.Finite(interval?.Low), UnseenParts.Finite(interval?.High));
    }

    private static int[] Known(CurveResult result) => [.. Enumerable.Range(0, result.Points.Count).Where(g => result.Points[g].Fitted is not null).OrderBy(g => result.Points[g].At[0])];

    private static double Value(CurveResult result, int g) => result.Points[g].Fitted!.Value;

    private static double Place(CurveResult result, int g) => result.Points[g].At[0];
}
