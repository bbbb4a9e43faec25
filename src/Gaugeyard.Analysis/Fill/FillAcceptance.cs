using System.Text.Json;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Analysis.Fill;

/// <summary>Turns a plan into the draft of the revision that holds its estimates: the same for a page and for the interface.</summary>
public static class FillAcceptance
{
    /// <summary>The next revision with the plan's estimates, or with those of them that are accepted.</summary>
    /// <param name="accepted">Record numbers to accept; all by default.</param>
    public static RevisionDraft Draft(RevisionContent content, FillPlanQuestion question, FillPlanAnswer plan, string note, IReadOnlySet<int>? accepted = null)
    {
        var cells = plan.Filled.Where(c => accepted is null || accepted.Contains(c.Record)).Select(c => new FilledCell(c.Record, c.Value, c.Low, c.High)).ToList();
        if (cells.Count == 0)
            throw new CannotAnswerException(plan.Filled.Count == 0 ? $"{plan.Headline} Nothing was filled." : "No estimate was accepted, so nothing was filled.");
        string way = JsonSerializer.SerializeToElement(question.Way, WireFormat.Json).GetString()!;
        string says = $"{Say.Count(cells.Count, "reading")} of {question.Reading} filled by {way} from {string.Join(", ", question.Predictors)}, {plan.Refused.Count} refused";
        return RunSetEdits.Fill(content, question.Reading, cells, way, question.Confidence, note.Length > 0 ? $"{says}: {note}" : says) with
        {
            Settings = JsonSerializer.SerializeToElement(question, WireFormat.Json),
        };
    }
}
