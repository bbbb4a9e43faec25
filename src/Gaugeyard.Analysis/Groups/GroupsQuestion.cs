using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Describing;

namespace Gaugeyard.Analysis.Groups;

/// <summary>What are the figures of some readings, by up to three columns?</summary>
public sealed record GroupsQuestion : Question<GroupsAnswer>
{
    private const int MostGroups = 2000;

    /// <summary>Number columns to describe.</summary>
    public IReadOnlyList<string> Readings { get; init; } = [];

    /// <summary>Columns to group by; none gives one group.</summary>
    public IReadOnlyList<string> By { get; init; } = [];

    /// <summary>Definition of quartiles: 6, 7 or 8.</summary>
    public int QuantileType { get; init; } = 7;

    public override GroupsAnswer Ask(RevisionContent content, WorkContext work)
    {
        if (Readings.Count == 0)
            throw new QuestionException("Name at least one reading.");
        if (By.Count > 3)
            throw new QuestionException($"Group by at most 3 columns, not {By.Count}.");
        if (QuantileType is not (6 or 7 or 8))
            throw new QuestionException($"quantileType must be 6, 7 or 8 but is {QuantileType}.");
        var sample = Sample.Of(content, this);
        var readings = Readings.Select(r => (Name: r, Values: sample.Number(r), content.Find(r)!.Unit)).ToArray();
        var grouping = Grouping.Of(sample, By, MostGroups);
        double[]? distance = content.FindRole(ColumnRole.Distance) is { } d ? Kilometres(sample.Number(d.Name), d.Unit) : null;
        bool perVehicle = (Count ?? CountBy.Vehicle) == CountBy.Vehicle && sample.VehicleOf is not null;
        var groups = new List<GroupRow>();
        foreach (var (key, rows) in grouping.Groups)
        {
            work.Cancel.ThrowIfCancellationRequested();
            work.Say((double)groups.Count / grouping.Groups.Count, "describing groups");
            groups.Add(new GroupRow(key, readings.ToDictionary(r => r.Name, r => Figures(sample, rows, r.Values, r.Unit, distance, perVehicle))));
        }
        var notes = Notes(sample, readings.Select(r => (r.Name, r.Unit)), groups, perVehicle);
        if (grouping.Dropped > 0)
            notes.Add($"Only the {MostGroups} largest groups are shown; {Say.Count(grouping.Dropped, "smaller group")} with {Say.Count(grouping.DroppedRecords, "record")} are not.");
        return new GroupsAnswer
        {
            Headline = Headlines.Groups(this, groups, readings[0].Name, readings[0].Unit),
            Basis = Known(sample, readings[0].Values, Readings.Count == 1 ? readings[0].Name : null),
            Groups = groups,
            Notes = notes,
            Method = Method(perVehicle),
        };
    }

    // with one reading the basis counts the records that have it
    private static Basis Known(Sample sample, double[] values, string? reading) =>
        (reading is null ? sample : sample.Keep([.. values.Select(v => !double.IsNaN(v))], $"{reading} missing")).Basis();

    private ReadingFigures Figures(Sample sample, int[] rows, double[] values, string? unit, double[]? distance, bool perVehicle)
    {
        int[] known = [.. rows.Where(i => !double.IsNaN(values[i]))];
        double[] runs = [.. known.Select(i => values[i])];
        int[] vehicles = sample.VehicleOf is { } of ? [.. known.Select(i => of[i])] : [.. Enumerable.Range(0, known.Length)];
        int vehicleCount = vehicles.Distinct().Count();
        var (summary, mean) = Describe(runs, vehicles, perVehicle);
        var split = sample.VehicleOf is null ? null : VarianceComponents.Of(runs, vehicles);
        var figures = new ReadingFigures
        {
            N = known.Length,
            Vehicles = sample.VehicleOf is null ? null : vehicleCount,
            Missing = rows.Length - known.Length,
            Mean = Finite(mean.Mean),
            Sd = Finite(summary.StandardDeviation),
            Se = Finite(mean.StandardError),
            Low = Finite(mean.Low),
            High = Finite(mean.High),
            Df = Finite(mean.Df),
            Median = Finite(summary.Median),
            Q1 = Finite(summary.LowerQuartile),
            Q3 = Finite(summary.UpperQuartile),
            Min = Finite(summary.Min),
            Max = Finite(summary.Max),
            Mad = Finite(summary.Mad),
            TrimmedMean = Finite(summary.TrimmedMean),
            Skewness = Finite(summary.Skewness),
            ExcessKurtosis = Finite(summary.ExcessKurtosis),
            GeometricMean = Finite(summary.GeometricMean),
            HarmonicMean = Finite(summary.HarmonicMean),
            BetweenVehicleSd = split is null ? null : Math.Sqrt(split.Between),
            WithinVehicleSd = split is null ? null : Math.Sqrt(split.Within),
            RepeatabilitySd = split is null ? null : Math.Sqrt(split.PooledWithin),
            Points = sample.VehicleOf is null ? runs : VehicleMean.OfEach(runs, vehicles).Means,
        };
        if (Unit.Find(unit) is not { Family: UnitFamily.Economy or UnitFamily.Consumption } known_)
            return figures;
        if (known_.Family == UnitFamily.Economy && runs.Length > 0 && runs.All(v => v > 0))
        {
            // consumption is 1 / economy up to the unit's factor; the ends of an interval swap when it is turned back
            double[] consumption = [.. runs.Select(v => known_.ToBase / v)];
            var (s, m) = Describe(consumption, vehicles, perVehicle);
            figures = figures with
            {
                AsConsumption = new ConsumptionFigures(known_.ToBase / m.Mean, Back(m.High), Back(m.Low), known_.ToBase / s.Median, known_.ToBase / s.UpperQuartile, known_.ToBase / s.LowerQuartile),
            };
        }
        if (distance is not null && TotalsOf(known, values, vehicles, distance, known_) is { } totals)
            figures = figures with { Totals = totals };
        return figures;

        double? Back(double c) => double.IsFinite(c) && c > 0 ? known_.ToBase / c : null;
    }

    private (SampleSummary, MeanInterval) Describe(double[] runs, int[] vehicles, bool perVehicle)
    {
        double[] units = perVehicle ? VehicleMean.OfEach(runs, vehicles).Means : runs;
        var summary = Summary.Of(units, Confidence, (QuantileType)QuantileType);
        return (summary, perVehicle || runs.Length == 0 ? summary.Mean : VehicleMean.OfRuns(runs, vehicles, Confidence));
    }

    private TotalFigures? TotalsOf(int[] known, double[] values, int[] vehicles, double[] distance, Unit unit)
    {
        int[] used = [.. Enumerable.Range(0, known.Length).Where(k => distance[known[k]] > 0 && values[known[k]] > 0)];
        if (used.Length == 0)
            return null;
        double[] distances = [.. used.Select(k => distance[known[k]])];
        double[] fuel = [.. used.Select((k, i) => distances[i] * unit.ToBaseValue(values[known[k]]))];
        var ratio = VehicleMean.OfTotals(fuel, distances, [.. used.Select(k => vehicles[k])], Confidence);
        double? Back(double c) => double.IsFinite(c) && c > 0 ? unit.FromBaseValue(c) : null;
        return unit.Family == UnitFamily.Economy
            ? new TotalFigures(unit.FromBaseValue(ratio.Mean), Back(ratio.High), Back(ratio.Low))
            : new TotalFigures(unit.FromBaseValue(ratio.Mean), Back(ratio.Low), Back(ratio.High));
    }

    private static double[] Kilometres(double[] values, string? unit) =>
        Unit.Find(unit) is { Family: UnitFamily.Distance } u ? [.. values.Select(u.ToBaseValue)] : values;

    private List<string> Notes(Sample sample, IEnumerable<(string Name, string? Unit)> readings, List<GroupRow> groups, bool perVehicle)
    {
        var notes = new List<string>();
        if (Vehicles == VehicleUse.Ignore && sample.Content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent, so the intervals are too narrow where runs of one vehicle repeat.");
        foreach (var (name, unit) in readings.Where(r => Unit.IsEconomy(r.Unit)))
            notes.Add($"{name} is distance per fuel. Its plain mean overrates; the mean of the consumption, turned back into {Unit.LabelOf(unit)}, stands first.");
        if (WithFilled && sample.Content.Marks.Values.Any(m => m.Values.Any(x => x.State == CellState.Filled)))
            notes.Add("Filled readings take part as if they were measured: the intervals do not carry the uncertainty of the estimates and are too narrow.");
        var few = groups.Where(g => g.Readings.Values.Any(f => f.Df is < 4 && f.N > f.Vehicles)).ToList();
        if (few.Count > 0 && !perVehicle)
            notes.Add($"{Say.List([.. few.Select(g => g.Label)], 4)}: fewer than about 4 degrees of freedom by vehicle, so the interval says little. Counting each vehicle once is safer.");
        var single = groups.Where(g => g.Readings.Values.Any(f => f is { N: > 0, Low: null })).ToList();
        if (single.Count > 0)
            notes.Add($"{Say.List([.. single.Select(g => g.Label)], 4)}: only one {(sample.VehicleOf is null ? "record" : "vehicle")}, so there is no interval.");
        if (groups.Exists(g => g.Key.Values.Any(v => v is null)))
            notes.Add("Records without a value in the grouping column are a group of their own.");
        return notes;
    }

    private List<string> Method(bool perVehicle) =>
    [
        perVehicle
            ? "Each vehicle counts once, with the mean of its runs; every figure but n and missing is one of those vehicle means. Intervals are t intervals of the vehicle means."
            : "Every run counts. Intervals use the CR2 variance with the vehicle as unit and Satterthwaite degrees of freedom (Bell and McCaffrey 2002; Pustejovsky and Tipton 2018); with one run per vehicle that is the t interval.",
        $"Quartiles are of Hyndman and Fan's type {QuantileType}; mad is scaled by 1.4826; the trimmed mean leaves out a tenth at each end; skewness and excess kurtosis are the adjusted forms G1 and G2. Spread between and within vehicles is by restricted maximum likelihood.",
        "Total consumption is the sum of fuel over the sum of distance, with a linearised interval by vehicle.",
        "These figures describe the vehicles, drivers and conditions tested; they are no certified or advertised values.",
    ];

    private static double? Finite(double value) => double.IsFinite(value) ? value : null;
}

/// <summary>Figures by group.</summary>
public sealed record GroupsAnswer : Answer
{
    public required IReadOnlyList<GroupRow> Groups { get; init; }
}

/// <summary>One group: its level in each grouping column (null where missing) and its figures per reading.</summary>
public sealed record GroupRow(IReadOnlyDictionary<string, string?> Key, IReadOnlyDictionary<string, ReadingFigures> Readings)
{
    /// <summary>The group as people call it.</summary>
    public string Label => Key.Count == 0 ? "all" : string.Join(" · ", Key.Values.Select(v => v ?? "(none)"));
}

/// <summary>Figures of one reading in one group; null where not defined.</summary>
public sealed record ReadingFigures
{
    public int N { get; init; }

    public int? Vehicles { get; init; }

    public int Missing { get; init; }

    public double? Mean { get; init; }

    public double? Sd { get; init; }

    public double? Se { get; init; }

    public double? Low { get; init; }

    public double? High { get; init; }

    public double? Df { get; init; }

    public double? Median { get; init; }

    public double? Q1 { get; init; }

    public double? Q3 { get; init; }

    public double? Min { get; init; }

    public double? Max { get; init; }

    public double? Mad { get; init; }

    public double? TrimmedMean { get; init; }

    public double? Skewness { get; init; }

    public double? ExcessKurtosis { get; init; }

    public double? GeometricMean { get; init; }

    public double? HarmonicMean { get; init; }

    public double? BetweenVehicleSd { get; init; }

    public double? WithinVehicleSd { get; init; }

    public double? RepeatabilitySd { get; init; }

    /// <summary>Mean of each vehicle, or every record where vehicles are not told apart, for the picture.</summary>
    [System.Text.Json.Serialization.JsonIgnore]
    public IReadOnlyList<double> Points { get; init; } = [];

    public ConsumptionFigures? AsConsumption { get; init; }

    public TotalFigures? Totals { get; init; }
}

/// <summary>Figures of an economy column computed as consumption and turned back into the column's unit.</summary>
public sealed record ConsumptionFigures(double Mean, double? Low, double? High, double Median, double Q1, double Q3);

/// <summary>Total distance over total fuel (or fuel over distance), in the column's unit.</summary>
public sealed record TotalFigures(double Value, double? Low, double? High);
