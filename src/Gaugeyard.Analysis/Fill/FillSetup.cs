using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Influences;
using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Filling;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Fill;

/// <summary>How missing readings can be filled, as the interface calls it.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<FillBy>))]
public enum FillBy
{
    [JsonStringEnumMemberName("group-mean")] GroupMean,
    [JsonStringEnumMemberName("stepwise-regression")] StepwiseRegression,
    [JsonStringEnumMemberName("regression")] Regression,
    [JsonStringEnumMemberName("local-regression")] LocalRegression,
    [JsonStringEnumMemberName("smoothing-spline")] SmoothingSpline,
    [JsonStringEnumMemberName("additive-model")] AdditiveModel,
    [JsonStringEnumMemberName("near-donors")] NearDonors,
    [JsonStringEnumMemberName("vehicle-carry")] VehicleCarry,
}

/// <summary>
/// The records of a fill: predictors and reading as arrays, the reading on the scale it is modelled on (consumption, where the
/// column holds economy) and the way back.
/// </summary>
internal sealed class FillSetup
{
    private readonly Unit? _economy;

    private FillSetup(Sample sample, FillData data, int[] known, int[] missing, Unit? economy) =>
        (Sample, Data, Known, Missing, _economy) = (sample, data, known, missing, economy);

    public Sample Sample { get; }

    public FillData Data { get; }

    /// <summary>Records (rows of the sample) with a measured reading and every predictor.</summary>
    public int[] Known { get; }

    /// <summary>Records whose reading is missing.</summary>
    public int[] Missing { get; }

    public bool Economy => _economy is not null;

    /// <summary>Whether every known reading is above zero, so that an estimate must be too.</summary>
    public bool Positive { get; private init; }

    public static FillSetup Of(RevisionContent content, Question question, string reading, IReadOnlyList<string> predictors)
    {
        if (predictors.Count == 0)
            throw new QuestionException("Name at least one predictor: what is known about the runs whose reading is missing.");
        if (predictors.Contains(reading))
            throw new QuestionException($"{reading} cannot predict itself.");
        // what was filled never trains or tests: the sample reads it as missing
        var sample = Sample.Of(content, question);
        var column = sample.Require(reading);
        double[] y = sample.Number(reading);
        var marks = content.MarksOf(reading);
        var specs = Terms.Specs(sample, [.. predictors.Distinct().Select(p => new Term { Column = p })], reading);
        // a fill may be made again, so filled cells count as missing; a reading that was set aside is not asked for
        int[] missing = [.. Enumerable.Range(0, sample.Count).Where(i => double.IsNaN(y[i]) && marks.GetValueOrDefault(sample.RecordAt(i))?.State is null or CellState.Missing or CellState.Filled or CellState.Corrected)
            .Where(i => column.IsMissing(sample.Rows[i]) || marks.GetValueOrDefault(sample.RecordAt(i))?.State == CellState.Filled)];
        var data = Terms.Data(sample, specs);
        var economy = Unit.Find(content.Find(reading)!.Unit) is { Family: UnitFamily.Economy } u && y.All(v => double.IsNaN(v) || v > 0) ? u : null;
        double[] modelled = economy is null ? y : [.. y.Select(v => economy.ToBase / v)];
        var fill = new FillData(data, specs, modelled, sample.VehicleOf ?? [.. Enumerable.Range(0, sample.Count)]);
        int[] known = [.. Enumerable.Range(0, sample.Count).Where(i => !double.IsNaN(y[i]) && fill.Complete(i))];
        if (known.Length < 8)
            throw new CannotAnswerException($"Only {Say.Count(known.Length, "record")} {(known.Length == 1 ? "has" : "have")} {reading} and every predictor; at least 8 are needed to learn from. Leave out predictors that are mostly missing.");
        if (known.Select(i => y[i]).Distinct().Take(2).Count() < 2)
            throw new CannotAnswerException($"{reading} has the same value in every known record, so there is nothing to learn from.");
        int vehicles = known.Select(i => fill.Vehicles[i]).Distinct().Count();
        if (vehicles < 3)
            throw new CannotAnswerException($"Only {Say.Count(vehicles, "vehicle")} {(vehicles == 1 ? "has" : "have")} known readings; the error of an estimate for another vehicle cannot be measured. Test at least 3, better 19, vehicles.");
        return new FillSetup(sample, fill, known, missing, economy) { Positive = known.All(i => y[i] > 0) };
    }

    /// <summary>Turns modelled values back into the column's own unit; the ends of an interval swap for economy.</summary>
    public (double Value, double Low, double High) Back(double value, double low, double high)
    {
        if (_economy is null)
            return (value, Positive && value > 0 ? Math.Max(low, 0) : low, high);
        // consumption cannot reach zero: the open end stays finite
        double least = 0.02 * Math.Abs(value);
        return (_economy.ToBase / Math.Max(value, 1e-12), _economy.ToBase / Math.Max(high, least), _economy.ToBase / Math.Max(low, least));
    }

    public static IFillWay WayOf(FillBy way) => way switch
    {
        FillBy.GroupMean => new GroupMeanWay(),
        FillBy.StepwiseRegression => new StepwiseWay(),
        FillBy.Regression => new RegressionWay(),
        FillBy.LocalRegression => new LocalRegressionWay(),
        FillBy.SmoothingSpline => new SmoothingSplineWay(),
        FillBy.NearDonors => new NearDonorsWay(),
        FillBy.VehicleCarry => new VehicleCarryWay(),
        _ => throw new QuestionException("The additive model is not offered as a way to fill yet. Choose local-regression, which also follows curved relations."),
    };

    public static string WordOf(FillBy way) => way switch
    {
        FillBy.GroupMean => "group mean",
        FillBy.StepwiseRegression => "stepwise regression",
        FillBy.Regression => "regression",
        FillBy.LocalRegression => "local regression",
        FillBy.SmoothingSpline => "smoothing spline",
        FillBy.NearDonors => "near donors",
        FillBy.VehicleCarry => "vehicle carry",
        _ => "additive model",
    };

    /// <summary>Notes about predictors that a way does not take.</summary>
    public IEnumerable<string> CarriedNotes(FillBy way)
    {
        string[] numbers = Data.Numbers;
        int most = way switch { FillBy.LocalRegression => 3, FillBy.SmoothingSpline => 1, _ => int.MaxValue };
        if (way == FillBy.GroupMean && Data.Terms.Count > 1)
            yield return Data.Categories.Length == 0 ? "The group mean takes no number predictors; without a category it is the mean of all." : $"The group mean goes by {Data.Categories[0]} alone.";
        if (numbers.Length > most)
            yield return $"{Say.Sentence(WordOf(way))} carries {(most == 1 ? "one number predictor" : $"{most} number predictors")}: it took {Say.List(LocalRegressionWay.Carried(Data, Known, most))}, which predict best.";
    }
}
