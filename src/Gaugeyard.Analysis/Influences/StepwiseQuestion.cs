using System.Text.Json;
using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

[JsonConverter(typeof(JsonStringEnumConverter<Criterion>))]
public enum Criterion
{
    [JsonStringEnumMemberName("aicc")] Aicc,
    [JsonStringEnumMemberName("aic")] Aic,
    [JsonStringEnumMemberName("bic")] Bic,
    [JsonStringEnumMemberName("partial-f")] PartialF,
}

[JsonConverter(typeof(JsonStringEnumConverter<Direction>))]
public enum Direction
{
    [JsonStringEnumMemberName("both")] Both,
    [JsonStringEnumMemberName("forward")] Forward,
    [JsonStringEnumMemberName("backward")] Backward,
}

[JsonConverter(typeof(JsonStringEnumConverter<StartFrom>))]
public enum StartFrom
{
    [JsonStringEnumMemberName("none")] None,
    [JsonStringEnumMemberName("all")] All,
}

/// <summary>Which of these candidates drive the reading?</summary>
public sealed record StepwiseQuestion : Question<StepwiseAnswer>
{
    public string Reading { get; init; } = "";

    /// <summary>Candidate terms: names of columns, or terms.</summary>
    [JsonConverter(typeof(CandidatesConverter))]
    public IReadOnlyList<Term> Candidates { get; init; } = [];

    public Criterion Criterion { get; init; }

    public Direction Direction { get; init; }

    public StartFrom? Start { get; init; }

    /// <summary>Labels of candidates that are always in.</summary>
    public IReadOnlyList<string> Keep { get; init; } = [];

    public double EnterP { get; init; } = 0.05;

    public double LeaveP { get; init; } = 0.10;

    /// <summary>Resamples of vehicles for the inclusion shares; 0 for none.</summary>
    public int Resamples { get; init; } = 100;

    public override StepwiseAnswer Ask(RevisionContent content, WorkContext work)
    {
        if (!(EnterP < LeaveP))
            throw new QuestionException($"enterP ({EnterP}) must be below leaveP ({LeaveP}), or a term could enter and leave for ever.");
        if (Resamples is < 0 or > 2000)
            throw new QuestionException($"resamples must lie between 0 and 2000 but is {Resamples}.");
        var sample = Sample.Of(content, this);
        sample.Number(Reading);
        var specs = Terms.Specs(sample, Candidates, Reading);
        int[] keep = [.. Keep.Select(k => specs.FindIndex(s => s.Label == k) is var at and >= 0 ? at : throw new QuestionException($"'{k}' is to be kept but is not among the candidates."))];
        sample = sample.Complete([Reading, .. specs.SelectMany(s => s.Variables)]);
        foreach (var log in specs.Where(s => s.Kind == TermKind.Log))
            sample = sample.Keep([.. sample.Number(log.Variable!).Select(v => v > 0)], $"{log.Variable} not positive");
        double[] y = sample.Number(Reading);
        if (sample.Count < 3)
            throw new CannotAnswerException($"Only {Say.Count(sample.Count, "record")} {(sample.Count == 1 ? "has" : "have")} {Reading} and every candidate. Leave out candidates that are mostly missing.");
        if (y.All(v => v == y[0]))
            throw new CannotAnswerException($"{Reading} has the same value in all {y.Length} records, so nothing can drive it.");
        var selection = new Selection(sample, specs, y, Options(keep), Confidence);
        work.Say(0.02, "choosing terms");
        var path = selection.Choose(work.Cancel);
        var honesty = Honesty.Of(selection, Resamples, Seed, work);
        var chosen = path.Chosen.Select(t => specs[t]).ToList();
        RegressionAnswer? model = null;
        var notes = new List<string>();
        if (chosen.Count > 0)
        {
            var terms = path.Chosen.Select(t => Candidates[t]).ToList();
            model = new RegressionQuestion { Revision = Revision, Slice = Slice, Seed = Seed, Count = Count, Vehicles = Vehicles, WithFilled = WithFilled, Confidence = Confidence, Reading = Reading, Terms = terms }.Ask(content, WorkContext.None);
            if (model.Basis.Records > sample.Count)
                notes.Add($"The choice used the {Say.Count(sample.Count, "record")} that have every candidate; the final fit uses all {model.Basis.Records} that have the chosen ones.");
        }
        if (sample.VehiclesRepeat && selection.Transformed)
            notes.Add("Runs repeat within vehicles, so the choice was made after the Fuller-Battese transform; otherwise facts about a vehicle are chosen far too easily.");
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent.");
        notes.Add("p-values after a choice on the same data look better than they are. The error on unseen vehicles was measured with the choice repeated inside each part.");
        return new StepwiseAnswer
        {
            Headline = Headline(chosen, honesty, content.Find(Reading)!.Unit),
            Basis = sample.Basis(),
            Steps = [.. path.Steps.Select(s => new WireStep(s.Term is null ? "start" : s.Adds ? "add" : "remove", s.Term is { } t ? specs[t].Label : null, Finite(s.Value), [.. s.Candidates.Select(c => new WireCandidate(specs[c.Term].Label, c.Adds ? "add" : "remove", Finite(c.Value)))]))],
            Chosen = [.. chosen.Select(c => c.Label)],
            Regression = model,
            Honesty = honesty,
            Notes = notes,
            Method =
            [
                $"Stepwise selection {Direction switch { Direction.Forward => "forward", Direction.Backward => "backward", _ => "both ways" }} by {Criterion switch { Criterion.Aicc => "AICc", Criterion.Aic => "AIC", Criterion.Bic => "BIC", _ => "partial F" }}. A category enters or leaves as a whole; a product only with its parents. All candidates are judged on the same records; constants of the criterion are left out.",
                "Error on unseen vehicles: the whole procedure, choice included, repeated with parts of the vehicles left out. Chosen shares: the choice repeated on vehicles drawn anew with replacement.",
                "Chosen terms go with the reading among the vehicles and conditions tested; a choice is not proof of a cause.",
            ],
        };
    }

    private StepwiseOptions Options(int[] keep) => new()
    {
        Criterion = Criterion switch { Criterion.Aic => SelectionCriterion.Aic, Criterion.Bic => SelectionCriterion.Bic, Criterion.PartialF => SelectionCriterion.PartialF, _ => SelectionCriterion.Aicc },
        Direction = Direction switch { Direction.Forward => SelectionDirection.Forward, Direction.Backward => SelectionDirection.Backward, _ => SelectionDirection.Both },
        StartWithAll = Direction == Direction.Backward || Start == StartFrom.All,
        Keep = keep.ToHashSet(),
        EnterP = EnterP,
        LeaveP = LeaveP,
    };

    private string Headline(List<TermSpec> chosen, HonestyFigures honesty, string? unit)
    {
        string error = honesty.CrossValidatedRmse is { } rmse ? $" Unseen vehicles are met within {Say.With(rmse, Say.DecimalsFor(rmse), unit)}." : "";
        if (chosen.Count == 0)
            return $"None of the {Say.Count(Candidates.Count, "candidate")} drives {Reading} beyond chance.{error}";
        var shares = honesty.Inclusion.ToDictionary(i => i.Term, i => i.Share);
        string names = Say.Sentence(Say.List([.. chosen.Select(c => c.Label)], 5));
        var shaky = chosen.Where(c => shares.GetValueOrDefault(c.Label, 1) < 0.7 && !Keep.Contains(c.Label)).MinBy(c => shares[c.Label]);
        string doubt = shaky is null ? "" : $" {Say.Sentence(shaky.Label)} is a coin toss: chosen in {Say.Percent(shares[shaky.Label])} of resamples.";
        return $"{names} {(chosen.Count == 1 ? "drives" : "drive")} {Reading}.{(doubt.Length > 0 ? doubt : error)}";
    }

    private static double? Finite(double value) => double.IsFinite(value) ? value : null;
}

/// <summary>Course and outcome of a selection, with what it is worth.</summary>
public sealed record StepwiseAnswer : Answer
{
    public required IReadOnlyList<WireStep> Steps { get; init; }

    public required IReadOnlyList<string> Chosen { get; init; }

    /// <summary>The chosen terms fitted; null when none was chosen.</summary>
    public RegressionAnswer? Regression { get; init; }

    public required HonestyFigures Honesty { get; init; }
}

public sealed record WireStep(string Move, string? Term, double? Value, IReadOnlyList<WireCandidate> Candidates);

public sealed record WireCandidate(string Term, string Move, double? Value);

/// <summary>What the selection is worth on vehicles it did not see, and how stably it chooses.</summary>
public sealed record HonestyFigures(double? CrossValidatedRmse, double? FullModelRmse, IReadOnlyList<InclusionShare> Inclusion)
{
    public int Resamples { get; init; }

    public int Folds { get; init; }
}

/// <summary>Share of resamples in which a term was chosen, and in which its effect had the sign it has here (number terms).</summary>
public sealed record InclusionShare(string Term, double Share);

/// <summary>Candidates may be plain column names or terms.</summary>
internal sealed class CandidatesConverter : JsonConverter<IReadOnlyList<Term>>
{
    public override IReadOnlyList<Term> Read(ref Utf8JsonReader reader, Type type, JsonSerializerOptions options)
    {
        var terms = new List<Term>();
        foreach (var e in JsonElement.ParseValue(ref reader).EnumerateArray())
            terms.Add(e.ValueKind == JsonValueKind.String ? new Term { Column = e.GetString() } : e.Deserialize<Term>(options)!);
        return terms;
    }

    public override void Write(Utf8JsonWriter writer, IReadOnlyList<Term> value, JsonSerializerOptions options) =>
        JsonSerializer.Serialize(writer, value.ToArray(), options);
}
