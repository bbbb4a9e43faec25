using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

/// <summary>How do these terms move the reading?</summary>
public sealed record RegressionQuestion : Question<RegressionAnswer>
{
    public string Reading { get; init; } = "";

    public IReadOnlyList<Term> Terms { get; init; } = [];

    /// <summary>Whether the answer lists every record with its fit and diagnostics.</summary>
    public bool Records { get; init; }

    public override RegressionAnswer Ask(RevisionContent content, WorkContext work)
    {
        var sample = Sample.Of(content, this);
        sample.Number(Reading);
        var specs = Influences.Terms.Specs(sample, Terms, Reading);
        sample = sample.Complete([Reading, .. specs.SelectMany(s => s.Variables)]);
        foreach (var log in specs.Where(s => s.Kind == TermKind.Log))
        {
            double[] values = sample.Number(log.Variable!);
            if (Array.Exists(values, v => !(v > 0)))
                sample = sample.Keep([.. values.Select(v => v > 0)], $"{log.Variable} not positive");
        }
        var notes = new List<string>();
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent.");
        var model = ModelFit.Of(sample, Reading, specs, Confidence, work);
        var fit = model.Fit;
        if (Unit.IsEconomy(content.Find(Reading)!.Unit))
            notes.Add($"{Reading} is distance per fuel; the fit takes its own numbers. Consumption is the better scale: terms add up there.");
        return new RegressionAnswer
        {
            Headline = Headline(model, content.Find(Reading)!.Unit),
            Basis = sample.Basis(),
            Coefficients = model.Coefficients,
            Fit = model.Figures,
            Dropped = model.Dropped,
            Effects = Effects.Of(model, Confidence),
            Gvif = model.Gvif,
            Records = Records ? model.Records(sample) : null,
            Residuals = model.Residuals(sample),
            Notes = [.. notes, .. model.Notes],
            Method =
            [
                "Least squares by Householder QR on centred, scaled columns, refined with residuals in double-double where that matters. Categories are coded against their base level.",
                sample.VehiclesRepeat
                    ? "Intervals and p-values use CR2 errors with the vehicle as unit and Satterthwaite degrees of freedom; classical and HC3 errors stand beside."
                    : "Intervals and p-values are the classical ones; errors that allow unequal spread (HC3) stand beside.",
                "A coefficient is what goes with one unit of its term, the other terms held, among the vehicles and conditions tested; it is not proof of a cause.",
            ],
        };
    }

    private string Headline(ModelFit model, string? unit)
    {
        var effects = Effects.Of(model, Confidence).Where(e => e.Low > 0 || e.High < 0).OrderByDescending(e => Math.Abs(e.Change)).Take(3).ToList();
        string share = $"These terms explain {Say.Percent(Math.Max(0, model.Figures.R2 ?? 0))} of the spread of {Reading}";
        int decimals = Say.DecimalsFor(model.Figures.S ?? 1);
        if (effects.Count == 0)
            return $"{share}, and none of them moves it beyond what chance could do here.";
        return $"{share}; {effects[0].Term} moves it most: {(effects[0].Change > 0 ? "+" : "")}{Say.With(effects[0].Change, decimals, unit)} from {effects[0].From} to {effects[0].To}.";
    }
}

/// <summary>A fitted model with its figures.</summary>
public sealed record RegressionAnswer : Answer
{
    public required IReadOnlyList<WireCoefficient> Coefficients { get; init; }

    public required FitFigures Fit { get; init; }

    public required IReadOnlyList<DroppedTerm> Dropped { get; init; }

    /// <summary>Change of the reading over the tested range of each term.</summary>
    public required IReadOnlyList<Effect> Effects { get; init; }

    /// <summary>Generalised variance inflation by term.</summary>
    public required IReadOnlyDictionary<string, double> Gvif { get; init; }

    public IReadOnlyList<RecordFit>? Records { get; init; }

    /// <summary>Residuals against fitted values for the picture, at most 5,000 of them with every large one kept.</summary>
    public required IReadOnlyList<RecordFit> Residuals { get; init; }
}

/// <summary>One coefficient. T, p and the interval are vehicle-aware where vehicles repeat.</summary>
public sealed record WireCoefficient(string Term, string? Level, IReadOnlyList<string>? Levels, double Estimate, double? Se, double? T, double? P, double? Low, double? High, double? SeHc3, double? SeVehicle)
{
    public double? Df { get; init; }
}

public sealed record FitFigures(int N, int Df, double Rss, double? S, double? R2, double? AdjustedR2, double? PressR2, double? Aic, double? Aicc, double? Bic, double? F, double? P);

/// <summary>A term, or a column of it, that is not in the fit.</summary>
public sealed record DroppedTerm(string Term, string Reason);

/// <summary>One record's place in a fit.</summary>
public sealed record RecordFit(int Record, double Fitted, double Residual, double Leverage, double? Studentized, double? Cook);

/// <summary>Change of the reading when one term goes over its tested range, the others held.</summary>
public sealed record Effect(string Term, string From, string To, double Change, double Low, double High);
