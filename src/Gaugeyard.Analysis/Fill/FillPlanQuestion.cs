using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Filling;

namespace Gaugeyard.Analysis.Fill;

/// <summary>What would be filled, cell by cell? Nothing is written.</summary>
public sealed record FillPlanQuestion : Question<FillPlanAnswer>
{
    public string Reading { get; init; } = "";

    public FillBy Way { get; init; } = FillBy.StepwiseRegression;

    public IReadOnlyList<string> Predictors { get; init; } = [];

    public override FillPlanAnswer Ask(RevisionContent content, WorkContext work)
    {
        var setup = FillSetup.Of(content, this, Reading, Predictors);
        if (setup.Missing.Length == 0)
            throw new CannotAnswerException($"No reading of {Reading} is missing here, so there is nothing to fill.");
        string? unit = content.Find(Reading)!.Unit;
        var way = FillSetup.WayOf(Way);
        var conformal = CrossConformal.Of(way, setup.Data, setup.Known, 0, Confidence, Seed, work.Stage(0, 0.9, $"training {FillSetup.WordOf(Way)} with vehicles left out"), work.Cancel);
        var range = TestedRange.Of(setup.Data, setup.Known, way.Uses(setup.Data, setup.Known));
        var filled = new List<PlannedCell>();
        var refused = new List<RefusedCell>();
        foreach (int i in setup.Missing)
        {
            work.Cancel.ThrowIfCancellationRequested();
            int record = setup.Sample.RecordAt(i);
            string label = setup.Sample.LabelAt(i);
            if (range.Refusal(i) is { } reason)
            {
                refused.Add(new RefusedCell(record, reason) { Label = label });
                continue;
            }
            var x = conformal.At(i);
            if (double.IsNaN(x.Value))
            {
                refused.Add(new RefusedCell(record, "nothing like it was tested") { Label = label });
                continue;
            }
            if (setup.Positive && x.Value <= 0)
            {
                refused.Add(new RefusedCell(record, $"the estimate would not be positive, as every known {Reading} is") { Label = label });
                continue;
            }
            var (value, low, high) = setup.Back(x.Value, x.Low, x.High);
            filled.Add(new PlannedCell(record, value, low, high) { Label = label, Vehicle = setup.Sample.VehicleNames?[setup.Sample.VehicleOf![i]], Claim = x.Claim == IntervalClaim.Proved ? "distribution-free" : "assumes normal errors" });
        }
        var notes = setup.CarriedNotes(Way).ToList();
        if (conformal.Vehicles < CrossConformal.FewestVehicles)
            notes.Add($"With {conformal.Vehicles} known {(setup.Sample.VehicleOf is null ? "records" : "vehicles")} the intervals assume normal errors: about 92 to 95 % is what they reach if that holds.");
        notes.Add("Estimates are not measurements. They stay marked in every picture, table and exported sheet, and are left out of comparisons unless you ask for them.");
        return new FillPlanAnswer
        {
            Headline = filled.Count == 0 ? $"None of the {Say.Count(setup.Missing.Length, "missing reading")} of {Reading} can be filled; each has its reason."
                : $"{Say.Count(filled.Count, "reading")} of {Reading} can be estimated by {FillSetup.WordOf(Way)}, with intervals of {Say.With(filled.Select(f => f.High - f.Low).Order().ElementAt(filled.Count / 2), Say.DecimalsFor(filled[0].High - filled[0].Low), unit)} width in the middle; {(refused.Count == 0 ? "none is refused" : $"{refused.Count} {(refused.Count == 1 ? "is" : "are")} refused")}.",
            Basis = setup.Sample.Basis() with { Records = setup.Known.Length, Vehicles = setup.Sample.VehicleOf is null ? null : conformal.Vehicles },
            Filled = filled,
            Refused = refused,
            Notes = notes,
            Method = ["CV+ intervals with the vehicle as unit, scaled by local spread; one vehicle left out at a time up to 200 vehicles, 20 parts beyond. If vehicles with missing readings are of the same kind as the tested ones, at least 90 % of nominal 95 % intervals hold the true reading on average (proved), usually about 95 %. Nothing is claimed for a single cell, or when readings are missing because of their value."],
        };
    }
}

/// <summary>Estimates and refusals for every missing reading.</summary>
public sealed record FillPlanAnswer : Answer
{
    public required IReadOnlyList<PlannedCell> Filled { get; init; }

    public required IReadOnlyList<RefusedCell> Refused { get; init; }
}

/// <summary>One estimate in the reading's own unit.</summary>
public sealed record PlannedCell(int Record, double Value, double Low, double High)
{
    public string? Label { get; init; }

    public string? Vehicle { get; init; }

    /// <summary>What the interval's level rests on.</summary>
    public string? Claim { get; init; }
}

/// <summary>One refusal with its reason.</summary>
public sealed record RefusedCell(int Record, string Reason)
{
    public string? Label { get; init; }
}
