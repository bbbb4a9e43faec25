using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange.Handover;

/// <summary>What goes with every hand-over in words: how to read it, how it came about, and what it must not be used for.</summary>
internal static class Cautions
{
    /// <summary>Names the form of the workbook; a reader of a later form still knows this one.</summary>
    public const string Form = "Gaugeyard hand-over, form 1";

    public static IReadOnlyList<string> Sentences { get; } =
    [
        "Estimates are not measurements. Filled cells are estimates with an interval; they stay marked and must stay marked wherever they are passed on.",
        "Not for type approval, certification, labelling, compliance, warranty, safety decisions or legal claims: the regulation or procedure that governs the test decides.",
        "The results describe the vehicles, drivers, routes and conditions that were tested, and nothing beyond them.",
        "Runs of one vehicle belong together: count vehicles, not runs, when you judge how sure a difference is.",
        "Average consumption, not distance per fuel: a mean of economy figures overstates the economy of the fleet.",
        "Road, track and dynamometer work can hurt people: site rules, local codes and licensed practice come first.",
        "Driver, vehicle identity, place and time of a run can be personal data; pass them on only as your rules allow.",
    ];

    /// <summary>Lines of the sheet "Method and cautions": a heading and a text each.</summary>
    public static IEnumerable<(string Heading, string Text)> Lines(HandoverTable table)
    {
        var content = table.Content;
        yield return ("form", Form);
        yield return ("run set", content.RunSet.Name);
        yield return ("revision", $"{content.Revision.Revision} of {content.RunSet.RevisedAt:yyyy-MM-dd HH:mm} (UTC{content.RunSet.RevisedAt:zzz})");
        yield return ("fingerprint", content.Revision.Fingerprint);
        yield return ("records", $"{content.Revision.Count}, of which {content.Revision.SetAside.Count} set aside");
        foreach (var column in table.Values)
        {
            var filled = content.Revision.MarksOf(column.Name).Values.Where(m => m.State == CellState.Filled).ToList();
            foreach (var way in filled.GroupBy(m => (m.Way, m.Confidence)))
                yield return ("filled", $"{column.Name}: {way.Count()} cells by {way.Key.Way ?? "an unnamed way"}{(way.Key.Confidence is { } c ? $", intervals of {100 * c:0.##} %" : "")}");
        }
        yield return ("states", "measured: as the file said. missing: no value. corrected: a person changed the value and gave a reason. filled: an estimate, not a measurement. set aside: left out of the analysis with a reason, never deleted.");
        yield return ("how to read", "Beside each column with filled, corrected or set-aside cells stand columns of the same name with 'state', 'low' and 'high'; low and high are the ends of a filled cell's interval in the column's unit. Shading repeats what the state column says.");
        yield return ("reading back", "The sheets Columns and Cell states keep kinds, roles, units and states, so that the workbook reads back into the portal with every filled cell still filled.");
        foreach (string sentence in Sentences)
            yield return ("caution", sentence);
    }
}
