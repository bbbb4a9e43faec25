using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Filling;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Fill;

/// <summary>How well could missing readings be filled? Known ones are hidden and estimated to find out.</summary>
public sealed record FillTrialQuestion : Question<FillTrialAnswer>
{
    private static readonly FillBy[] Usual = [FillBy.GroupMean, FillBy.StepwiseRegression, FillBy.Regression, FillBy.LocalRegression, FillBy.SmoothingSpline, FillBy.NearDonors];

    public string Reading { get; init; } = "";

    public IReadOnlyList<string> Predictors { get; init; } = [];

    /// <summary>Ways to try; all that need no further choice by default.</summary>
    public IReadOnlyList<FillBy>? Ways { get; init; }

    /// <summary>Parts of whole vehicles that are hidden in turn.</summary>
    public int Folds { get; init; } = 10;

    public override FillTrialAnswer Ask(RevisionContent content, WorkContext work)
    {
        if (Folds is < 2 or > 200)
            throw new QuestionException($"The number of parts must lie between 2 and 200 but is {Folds}.");
        var setup = FillSetup.Of(content, this, Reading, Predictors);
        var tried = (Ways ?? (setup.Sample.VehiclesRepeat ? [.. Usual, FillBy.VehicleCarry] : Usual)).Distinct().ToList();
        if (!tried.Contains(FillBy.GroupMean))
            tried.Insert(0, FillBy.GroupMean);
        string? unit = content.Find(Reading)!.Unit;
        var notes = new List<string>();
        var results = new List<WayResult>();
        var truths = new Dictionary<FillBy, List<HiddenShown>>();
        string? grouping = setup.Data.Categories.FirstOrDefault();
        for (int w = 0; w < tried.Count; w++)
        {
            var stage = work.Stage((double)w / tried.Count, (w + 1.0) / tried.Count, $"hiding known readings, {FillSetup.WordOf(tried[w])}");
            var hidden = HiddenTrial.Of(FillSetup.WayOf(tried[w]), setup.Data, setup.Known, Folds, Confidence, Seed, stage, work.Cancel);
            var shown = hidden.Select(h => Show(setup, h)).ToList();
            truths[tried[w]] = shown;
            results.Add(Result(tried[w], shown, setup, grouping));
            notes.AddRange(setup.CarriedNotes(tried[w]));
        }
        // ways that refuse more are spared the hardest readings: the choice between them rests on the readings that none refused
        var shared = Enumerable.Range(0, setup.Known.Length).Where(k => truths.Values.All(t => t[k].Estimate is not null)).ToList();
        for (int w = 0; w < results.Count; w++)
            results[w] = results[w] with { SharedRmse = shared.Count == 0 ? null : Math.Sqrt(shared.Average(k => Math.Pow(truths[results[w].Way][k].Estimate!.Value - truths[results[w].Way][k].Truth, 2))) };
        if (shared.Count > 0 && shared.Count < setup.Known.Length)
            notes.Add($"Ways refuse different readings. On the {shared.Count} that none refused: {string.Join(", ", results.OrderBy(r => r.SharedRmse).Select(r => $"{FillSetup.WordOf(r.Way)} {Say.Number(r.SharedRmse ?? 0, Say.DecimalsFor(r.SharedRmse ?? 1))}"))}; the recommendation rests on these.");
        var floor = results.First(r => r.Way == FillBy.GroupMean);
        var best = results.Where(r => r.Way != FillBy.GroupMean && r.Rmse is not null).DefaultIfEmpty(floor).MinBy(r => r.SharedRmse ?? r.Rmse)!;
        bool worth = (best.SharedRmse ?? best.Rmse) < (floor.SharedRmse ?? floor.Rmse);
        var recommended = worth ? best.Way : FillBy.GroupMean;
        notes.AddRange(Warnings(setup, content));
        return new FillTrialAnswer
        {
            Headline = Headline(setup, results.First(r => r.Way == recommended), floor, unit, worth),
            Basis = setup.Sample.Basis() with { Records = setup.Known.Length, Vehicles = setup.Sample.VehicleOf is null ? null : setup.Known.Select(i => setup.Data.Vehicles[i]).Distinct().Count() },
            Ways = results,
            Recommended = recommended,
            MissingReadings = setup.Missing.Length,
            Hidden = truths[recommended],
            FairSample = FairSample(setup, work.Cancel),
            Notes = notes,
            Method =
            [
                $"Every known reading was hidden once, in {Folds} parts of whole {(setup.Sample.VehicleOf is null ? "records" : "vehicles")}, and estimated by a way trained on the others. Its interval was built without the hidden {(setup.Sample.VehicleOf is null ? "records" : "vehicles")} too.",
                "Intervals: CV+ with the vehicle as unit and equal weight per vehicle, scaled by local spread (Barber, Candès, Ramdas and Tibshirani 2021). For a nominal 95 %: at least 90 % is proved if vehicles with missing readings are of the same kind as the tested ones, about 95 % is usual.",
                setup.Economy ? "The reading is distance per fuel: estimates are made as consumption and turned back; errors are given in the reading's own unit." : "Estimates are made on the reading's own scale.",
                "Estimates are not measurements: not for type approval, certification, safety decisions or legal claims, unless the authority has approved the method in advance.",
            ],
        };
    }

    private static HiddenShown Show(FillSetup setup, HiddenReading h)
    {
        double truth = setup.Back(h.Truth, h.Truth, h.Truth).Value;
        // an estimate that is not positive is refused for a reading that always is
        if (h.Refused || (setup.Positive && h.Estimate <= 0))
            return new HiddenShown(setup.Sample.RecordAt(h.Row), truth, null, null, null) { Row = h.Row };
        var (value, low, high) = setup.Back(h.Estimate, h.Low, h.High);
        return new HiddenShown(setup.Sample.RecordAt(h.Row), truth, value, low, high) { Row = h.Row };
    }

    private static WayResult Result(FillBy way, List<HiddenShown> shown, FillSetup setup, string? grouping)
    {
        var (bias, mae, rmse, coverage, width, refused) = Figures(shown);
        var groups = new List<GroupResult>();
        if (grouping is not null)
        {
            var (codes, levels) = setup.Data.Predictors.Categories[grouping];
            foreach (var g in shown.GroupBy(h => codes[h.Row]).OrderBy(g => g.Key))
            {
                var (b, m, r, c, w, f) = Figures([.. g]);
                groups.Add(new GroupResult(levels[g.Key], g.Count(), g.Select(h => setup.Data.Vehicles[h.Row]).Distinct().Count(), b, m, r, c, w, f));
            }
        }
        // runs of a vehicle miss together: coverage is judged by vehicles
        var rates = shown.Where(h => h.Estimate is not null).GroupBy(h => setup.Data.Vehicles[h.Row]).ToArray();
        var interval = VehicleMean.OfRuns([.. shown.Where(h => h.Estimate is not null).Select(h => h.Inside ? 1.0 : 0)], [.. shown.Where(h => h.Estimate is not null).Select(h => setup.Data.Vehicles[h.Row])], 0.95);
        return new WayResult(way, bias, mae, rmse, coverage, width, refused, groups)
        {
            CoverageLow = double.IsFinite(interval.Low) ? Math.Max(0, interval.Low) : null,
            CoverageHigh = double.IsFinite(interval.High) ? Math.Min(1, interval.High) : null,
            Vehicles = rates.Length,
        };
    }

    private static (double? Bias, double? Mae, double? Rmse, double? Coverage, double? Width, double Refused) Figures(List<HiddenShown> shown)
    {
        var used = shown.Where(h => h.Estimate is not null).ToList();
        double refused = shown.Count == 0 ? 0 : 1 - (double)used.Count / shown.Count;
        if (used.Count == 0)
            return (null, null, null, null, null, refused);
        double[] errors = [.. used.Select(h => h.Estimate!.Value - h.Truth)];
        return (errors.Average(), errors.Average(Math.Abs), Math.Sqrt(errors.Average(e => e * e)), used.Count(h => h.Inside) / (double)used.Count,
            Quantiles.Median([.. used.Select(h => h.High!.Value - h.Low!.Value)]), refused);
    }

    private string Headline(FillSetup setup, WayResult best, WayResult floor, string? unit, bool worth)
    {
        int decimals = Say.DecimalsFor(best.Rmse ?? 1);
        if (setup.Missing.Length == 0)
            return $"No reading of {Reading} is missing here. Hidden readings would be met within {Say.With(best.Rmse ?? 0, decimals, unit)}.";
        if (!worth)
            return $"No way beats the plain group mean on hidden readings ({Say.With(floor.Rmse ?? 0, decimals, unit)}). Name predictors that say more about {Reading}.";
        return $"{Say.Sentence(FillSetup.WordOf(best.Way))} met hidden readings within {Say.With(best.Rmse ?? 0, decimals, unit)} on average, against {Say.Number(floor.Rmse ?? 0, decimals)} for the group mean, and {Say.Percent(best.Coverage ?? 0, 1)} of them lay inside their {Say.Percent(Confidence)} interval.";
    }

    private List<string> Warnings(FillSetup setup, RevisionContent content)
    {
        var notes = new List<string>();
        int vehicles = setup.Known.Select(i => setup.Data.Vehicles[i]).Distinct().Count();
        string unitWord = setup.Sample.VehicleOf is null ? "records" : "vehicles";
        if (vehicles < CrossConformal.FewestVehicles)
            notes.Add($"With {vehicles} known {unitWord} no distribution-free 95 % interval exists ({CrossConformal.FewestVehicles} are needed): the intervals assume normal errors, and about 92 to 95 % is what they reach if that holds.");
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record is hidden on its own, which flatters the error for vehicles that were never tested.");
        double share = setup.Missing.Length / (double)Math.Max(1, setup.Missing.Length + setup.Known.Length);
        if (share > 0.1)
            notes.Add($"{Say.Percent(share)} of the readings are missing. Above about 10 % it is better to measure again than to estimate.");
        foreach (string n in setup.Data.Numbers)
        {
            double[] x = [.. setup.Known.Select(i => setup.Data.Predictors.Numbers[n][i])], y = [.. setup.Known.Select(i => setup.Data.Y[i])];
            double mx = x.Average(), my = y.Average(), sxy = x.Zip(y, (a, b) => (a - mx) * (b - my)).Sum(), sxx = x.Sum(a => (a - mx) * (a - mx)), syy = y.Sum(b => (b - my) * (b - my));
            if (sxx > 0 && syy > 0 && sxy * sxy / (sxx * syy) > 0.999)
                notes.Add($"{n} follows {Reading} almost exactly. If it is the same reading under another name, it will be missing where {Reading} is, and the trial promises too much.");
        }
        return notes;
    }

    private FairSample FairSample(FillSetup setup, CancellationToken cancel)
    {
        var differences = new List<StandardizedDifference>();
        var known = setup.Sample.Number(Reading).Select(v => !double.IsNaN(v)).ToArray();
        var missing = setup.Missing.ToHashSet();
        int[] a = [.. Enumerable.Range(0, known.Length).Where(i => known[i])];
        int[] b = [.. missing.Order()];
        foreach (var term in setup.Data.Terms)
        {
            string name = term.Variable!;
            if (setup.Data.Predictors.Numbers.TryGetValue(name, out double[]? values))
            {
                var ma = Moments.Of([.. a.Select(i => values[i]).Where(double.IsFinite)]);
                var mb = Moments.Of([.. b.Select(i => values[i]).Where(double.IsFinite)]);
                double sd = Math.Sqrt((ma.Variance + mb.Variance) / 2);
                if (sd > 0)
                    differences.Add(new StandardizedDifference(name, null, (mb.Mean - ma.Mean) / sd));
            }
            else
            {
                var (codes, levels) = setup.Data.Predictors.Categories[name];
                for (int k = 0; k < levels.Length; k++)
                {
                    double pa = a.Length == 0 ? 0 : a.Count(i => codes[i] == k) / (double)a.Length, pb = b.Length == 0 ? 0 : b.Count(i => codes[i] == k) / (double)b.Length;
                    double sd = Math.Sqrt((pa * (1 - pa) + pb * (1 - pb)) / 2);
                    if (sd > 0)
                        differences.Add(new StandardizedDifference(name, levels[k], (pb - pa) / sd));
                }
            }
        }
        double[][] columns = [setup.Data.Y, .. setup.Data.Numbers.Select(n => setup.Data.Predictors.Numbers[n])];
        var little = setup.Missing.Length == 0 ? null : LittleTest.Of(columns, cancel);
        var largest = differences.OrderByDescending(d => Math.Abs(d.Standardized)).FirstOrDefault();
        string says = setup.Missing.Length == 0 ? "Nothing is missing."
            : little is { P: < 0.05 } || (largest is not null && Math.Abs(largest.Standardized) > 0.25)
                ? $"The gap is not a fair sample: {(largest is null ? "the readings differ" : largest.Level is null ? $"{largest.Column} is {(largest.Standardized > 0 ? "higher" : "lower")} by {Say.Number(Math.Abs(largest.Standardized), 2)} spreads" : $"{largest.Column} '{largest.Level}' is {(largest.Standardized > 0 ? "more" : "less")} common")} where {Reading} is missing. Whether it also depends on the reading itself cannot be seen from the data."
                : "Nothing recorded tells the missing readings from the known ones. Whether they depend on the reading itself cannot be seen from the data.";
        return new FairSample(little?.P, [.. differences.OrderByDescending(d => Math.Abs(d.Standardized))], says);
    }
}

/// <summary>What the trial found.</summary>
public sealed record FillTrialAnswer : Answer
{
    public required IReadOnlyList<WayResult> Ways { get; init; }

    public required FillBy Recommended { get; init; }

    public int MissingReadings { get; init; }

    /// <summary>Every hidden reading of the recommended way.</summary>
    public required IReadOnlyList<HiddenShown> Hidden { get; init; }

    public required FairSample FairSample { get; init; }
}

/// <summary>Errors of one way on hidden readings, in the reading's own unit.</summary>
public sealed record WayResult(FillBy Way, double? Bias, double? Mae, double? Rmse, double? Coverage, double? MedianWidth, double RefusedShare, IReadOnlyList<GroupResult> Groups)
{
    /// <summary>95 % interval of the coverage, with the vehicle as unit.</summary>
    public double? CoverageLow { get; init; }

    public double? CoverageHigh { get; init; }

    /// <summary>Root mean square error on the readings that no way refused.</summary>
    public double? SharedRmse { get; init; }

    public int Vehicles { get; init; }
}

public sealed record GroupResult(string Group, int N, int Vehicles, double? Bias, double? Mae, double? Rmse, double? Coverage, double? MedianWidth, double RefusedShare);

/// <summary>One hidden reading; the estimate is null where it was refused.</summary>
public sealed record HiddenShown(int Record, double Truth, double? Estimate, double? Low, double? High)
{
    [System.Text.Json.Serialization.JsonIgnore]
    public int Row { get; init; }

    public bool Inside => Low <= Truth && Truth <= High;
}

/// <summary>Whether the missing readings are like the known ones.</summary>
public sealed record FairSample(double? LittleP, IReadOnlyList<StandardizedDifference> Differences, string Says);

public sealed record StandardizedDifference(string Column, string? Level, double Standardized);
