using Gaugeyard.Analysis.Wording;
using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>What is said about stand-outs.</summary>
internal static class StandoutWords
{
    public static string Slip(EntrySuspicion slip) => slip.Slip switch
    {
        EntrySlip.ShiftedDecimal => "a shifted decimal?",
        EntrySlip.OtherUnit => $"entered in {slip.Unit}?",
        EntrySlip.TransposedDigits => "two digits swapped?",
        _ => "a missing or stray sign?",
    };

    /// <summary>Why a record or vehicle stands off.</summary>
    public static string Why(IReadOnlyList<StandoutCell> cells, IReadOnlyDictionary<string, string?> units, string like) =>
        string.Join("; ", cells.Take(3).Select(c =>
        {
            string? unit = units.GetValueOrDefault(c.Column);
            int decimals = Say.DecimalsFor(Math.Abs(c.Value - c.Expected));
            if (c.WouldBe is { } wouldBe)
                return $"{c.Column} {Say.With(c.Value, Written(c.Value), unit)} would fit as {Say.With(wouldBe, Say.DecimalsFor(wouldBe / 10), unit)}: {c.Suspicion}";
            double off = c.Value - c.Expected;
            return $"{c.Column} {Say.With(Math.Abs(off), decimals, unit)} {(off > 0 ? "above" : "below")} {like} ({Say.Number(c.Value, decimals)}, expected {Say.Number(c.Expected, decimals)})";
        })) + (cells.Count > 3 ? $"; and {cells.Count - 3} more" : "");

    /// <summary>The finding.</summary>
    public static string Headline(int off, int records, int vehiclesOff, int? vehicles, bool byVehicle, int otherRuns, int otherVehicles, IReadOnlyList<StandoutExplanation> explanations, int suspects)
    {
        // one second sentence: a shared value of a category says most, then slips, then a shifted number
        string slips = suspects > 0 ? $" {Say.Count(suspects, byVehicle ? "run looks" : "record looks", byVehicle ? "runs look" : "records look")} like a slip of entry." : "";
        var shared = explanations.FirstOrDefault(e => e.Level is not null && e.Counted != "runs");
        string cause = shared is not null && !(byVehicle && vehiclesOff == 0) ? " " + shared.Cause : slips.Length > 0 ? slips : explanations.Count > 0 ? " " + explanations[0].Cause : "";
        if (!byVehicle)
            return off == 0 ? $"None of {Say.Count(records, "record")} stands off from the others." : $"{Say.Number(off, 0)} of {Say.Count(records, "record")} {(off == 1 ? "stands" : "stand")} off.{cause}";
        string runs = otherRuns == 0 ? "" : $"{Say.Count(otherRuns, "single run")} of {Say.Count(otherVehicles, vehiclesOff > 0 ? "other vehicle" : "vehicle")}";
        if (vehiclesOff == 0)
            return runs.Length == 0
                ? $"None of {vehicles} vehicles stands off, and none of {Say.Count(records, "run")}."
                : $"No vehicle stands off as a whole, but {runs} {(otherRuns == 1 ? "does" : "do")}.{cause}";
        return $"{Say.Number(vehiclesOff, 0)} of {vehicles} vehicles {(vehiclesOff == 1 ? "stands" : "stand")} off{(runs.Length == 0 ? "" : $", and {runs}")}.{cause}";
    }

    /// <summary>Decimals a number was written with, at most 4.</summary>
    private static int Written(double value)
    {
        string text = value.ToString("0.####", System.Globalization.CultureInfo.InvariantCulture);
        int point = text.IndexOf('.', StringComparison.Ordinal);
        return point < 0 ? 0 : text.Length - point - 1;
    }
}
