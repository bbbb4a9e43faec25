using Gaugeyard.Analysis.Wording;

namespace Gaugeyard.Analysis.Groups;

/// <summary>The findings about groups as sentences.</summary>
internal static class Headlines
{
    public static string Groups(GroupsQuestion question, IReadOnlyList<GroupRow> groups, string reading, string? unit)
    {
        var known = groups.Select(g => (g.Label, F: g.Readings[reading])).Where(g => g.F.N > 0)
            .Select(g => (g.Label, Mean: g.F.AsConsumption?.Mean ?? g.F.Mean!.Value, Low: g.F.AsConsumption is { } c ? c.Low : g.F.Low, High: g.F.AsConsumption is { } d ? d.High : g.F.High)).ToList();
        if (known.Count == 0)
            return $"No record has a value of {reading} here. Widen the slice or choose another reading.";
        double spread = known.Max(g => g.Mean) - known.Min(g => g.Mean);
        int decimals = Say.DecimalsFor(known.Where(g => g.High is not null).Select(g => (g.High!.Value - g.Low!.Value) / 2).DefaultIfEmpty(spread).Min());
        string Interval((string Label, double Mean, double? Low, double? High) g) =>
            g.Low is { } low && g.High is { } high ? $" ({Say.Range(low, high, decimals)})" : "";
        if (known.Count == 1)
            return $"{Say.Sentence(reading)} is {Say.With(known[0].Mean, decimals, unit)} on average{Interval(known[0])}.";
        var highest = known.MaxBy(g => g.Mean);
        var lowest = known.MinBy(g => g.Mean);
        return $"{Say.Sentence(reading)} runs from {Say.Number(lowest.Mean, decimals)}{Interval(lowest)} for {lowest.Label} to {Say.With(highest.Mean, decimals, unit)}{Interval(highest)} for {highest.Label}.";
    }

    public static string Comparison(string reading, string? unit, IReadOnlyList<string> levels, double[] means, IReadOnlyList<ComparedPair> pairs, double alpha, bool perVehicle)
    {
        var told = pairs.Where(p => p.P < alpha).ToList();
        if (told.Count == 0)
        {
            var widest = pairs.MaxBy(p => p.High - p.Low);
            double half = widest is null ? double.NaN : (widest.High - widest.Low) / 2 ?? double.NaN;
            return $"No two groups can be told apart on {reading} with these {(perVehicle ? "vehicles" : "records")}. A difference below about {Say.With(half, Say.DecimalsFor(half), unit)} would not show.";
        }
        int top = Array.IndexOf(means, means.Max()), bottom = Array.IndexOf(means, means.Min());
        var extreme = pairs.FirstOrDefault(p => (p.A == levels[bottom] && p.B == levels[top]) || (p.A == levels[top] && p.B == levels[bottom]));
        string first;
        if (extreme is { } e && e.P < alpha && e.Low is { } low && e.High is { } high)
        {
            double difference = Math.Abs(e.Difference), l = e.Difference < 0 ? -high : low, h = e.Difference < 0 ? -low : high;
            int decimals = Say.DecimalsFor((h - l) / 2);
            first = $"{levels[top]} is {Say.With(difference, decimals, unit)} above {levels[bottom]} on {reading} ({Say.Range(l, h, decimals)})";
        }
        else
        {
            var best = told.MinBy(p => p.P)!;
            int decimals = Say.DecimalsFor(((best.High - best.Low) / 2) ?? double.NaN);
            first = $"{(best.Difference > 0 ? best.B : best.A)} is {Say.With(Math.Abs(best.Difference), decimals, unit)} above {(best.Difference > 0 ? best.A : best.B)} on {reading}";
        }
        string second = levels.Count == 2 ? "" : told.Count == pairs.Count
            ? "; all groups are told apart"
            : $"; {told.Count} of {pairs.Count} pairs are told apart";
        return $"{first}{second}.";
    }
}
