using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>What stands off when several readings are seen together?</summary>
public sealed record StandoutsQuestion : Question<StandoutsAnswer>
{
    /// <summary>Most records listed one by one.</summary>
    public const int MostListed = 1000;

    /// <summary>Most readings judged together.</summary>
    public const int MostReadings = 12;

    /// <summary>Fewest records of a level for a record to be judged among its like.</summary>
    private const int FewestAmong = 5;

    /// <summary>One to twelve number columns.</summary>
    public IReadOnlyList<string> Readings { get; init; } = [];

    /// <summary>False-discovery rate: the share of the named records that is expected to be chance, at most. In (0, 0.5]; 0.05 by default.</summary>
    public double Cut { get; init; } = 0.05;

    /// <summary>Column whose value names a record; by default its run name, else its vehicle, else its number.</summary>
    public string? Label { get; init; }

    /// <summary>A category: each record is judged among the records of its own level. Null judges all together.</summary>
    public string? Among { get; init; }

    public override StandoutsAnswer Ask(RevisionContent content, WorkContext work)
    {
        Check();
        var sample = Sample.Of(content, this);
        double[][] incomplete = [.. Readings.Select(sample.Number)];
        var correlations = Correlate(sample, incomplete, work.Cancel);
        sample = sample.Complete(Among is null ? Readings : [.. Readings, Among]);
        var notes = new List<string>();
        if (Among is not null)
            sample = KeepJudged(sample, notes);
        double[][] values = [.. Readings.Select(sample.Number)];
        var (among, levels) = Among is null ? (null, []) : sample.Category(Among);
        bool byVehicle = sample.VehiclesRepeat;
        var units = Readings.Select(r => EntryUnits.Of(content.Find(r)!.Unit)).ToArray();
        var unitOf = Readings.Distinct(StringComparer.Ordinal).ToDictionary(r => r, r => content.Find(r)!.Unit, StringComparer.Ordinal);
        string like = Among is null ? "what its other readings suggest" : "its like";
        string?[] unitCodes = [.. Readings.Select(r => content.Find(r)!.Unit)];
        int[][]? runsOf = byVehicle ? RunsOf(sample) : null;

        var vehicles = byVehicle ? JudgeVehicles(sample, values, units, unitOf, like, notes, work) : null;
        bool onlyVehicles = Count == CountBy.Vehicle && byVehicle;
        if (onlyVehicles && vehicles is null)
            throw new CannotAnswerException(notes[^1]);
        work.Say(0.3, byVehicle ? "judging runs" : "judging records");
        var judged = Judged.Of(values, Readings, among, levels.Length, byVehicle ? "runs" : "records", Seed, work.Stage(0.3, 0.9, byVehicle ? "judging runs" : "judging records"), work.Cancel);
        var off = new bool[sample.Count];
        int[] order = [.. Enumerable.Range(0, sample.Count).Where(i => judged.Q[i] <= Cut).OrderByDescending(i => judged.Mcd.RawDistances[i])];
        foreach (int i in order)
            off[i] = true;
        if (onlyVehicles)
        {
            var named = vehicles!.Select(v => v.Vehicle).ToHashSet(StringComparer.Ordinal);
            order = [.. Enumerable.Range(0, sample.Count).Where(i => named.Contains(sample.VehicleNames![sample.VehicleOf![i]])).OrderByDescending(i => judged.Mcd.RawDistances[i])];
            off = [.. Enumerable.Range(0, sample.Count).Select(i => named.Contains(sample.VehicleNames![sample.VehicleOf![i]]))];
        }
        if (Label is not null)
            sample.Require(Label);
        var records = order.Take(MostListed).Select(i =>
        {
            var cells = judged.Cells(i, Readings, units, unitCodes, Usual(values, i, runsOf?[sample.VehicleOf![i]]));
            return new StandoutRecord(sample.RecordAt(i), LabelOf(sample, i), judged.Distance(i), judged.P[i], [.. cells.Select(c => c.Column)])
            {
                Vehicle = sample.VehicleOf is null ? null : sample.VehicleNames![sample.VehicleOf[i]],
                Q = judged.Q[i],
                ReweightedDistance = Math.Sqrt(judged.Mcd.Distances[i]),
                Details = cells,
                Why = StandoutWords.Why(cells, unitOf, like),
            };
        }).ToList();
        if (vehicles is not null && !onlyVehicles)
            vehicles = [.. vehicles.Select(v => v with { RunsStandingOff = v.Records.Count(r => off[IndexOf(sample, r)]) })];
        work.Say(0.92, "looking for what they share");
        var concerned = (bool[])off.Clone();
        foreach (int record in vehicles?.SelectMany(v => v.Records) ?? [])
            concerned[IndexOf(sample, record)] = true;
        var explanations = Explanations.Of(sample, concerned, [.. Readings, .. Among is null ? [] : new[] { Among }], work.Cancel);
        AddNotes(sample, byVehicle, onlyVehicles, order.Length, notes, content, explanations);

        var standing = vehicles?.Select(v => v.Vehicle).ToHashSet(StringComparer.Ordinal) ?? [];
        int[] others = byVehicle ? [.. order.Where(i => !standing.Contains(sample.VehicleNames![sample.VehicleOf![i]]))] : [];
        return new StandoutsAnswer
        {
            Headline = StandoutWords.Headline(order.Length, sample.Count, standing.Count, sample.VehicleCount, byVehicle, others.Length,
                others.Select(i => sample.VehicleOf![i]).Distinct().Count(), explanations, records.Count(r => r.Details.Any(d => d.Suspicion is not null))),
            Basis = sample.Basis(),
            Records = records,
            StandingOff = order.Length,
            Vehicles = vehicles,
            Explanations = explanations,
            WithAndWithout = [.. Readings.Select((r, j) => Both(r, values[j], concerned))],
            Correlations = correlations,
            FalseDiscoveryRate = Cut,
            DistanceCut = order.Length == 0 || onlyVehicles ? null : judged.Distance(order[^1]),
            Notes = notes,
            Method = Method(sample, judged, byVehicle),
        };
    }

    private void Check()
    {
        if (Readings.Count is < 1 or > MostReadings)
            throw new QuestionException($"Name between 1 and {MostReadings} readings; {Readings.Count} were named.");
        if (Readings.Distinct(StringComparer.Ordinal).Count() < Readings.Count)
            throw new QuestionException("A reading is named twice. Name each once.");
        if (Cut is not (> 0 and <= 0.5))
            throw new QuestionException($"cut is the share of named records that may be chance: above 0 and at most 0.5, for example 0.05, but it is {Cut}.");
        if (Among is not null && Readings.Contains(Among, StringComparer.Ordinal))
            throw new QuestionException($"'{Among}' is judged and cannot also be what records are judged among. Choose another category.");
    }

    private Sample KeepJudged(Sample sample, List<string> notes)
    {
        var (codes, levels) = sample.Category(Among!);
        if (levels.Length > sample.Count / FewestAmong)
            throw new QuestionException($"'{Among}' has {levels.Length} values for {sample.Count} records; too few of each to judge a record among its like. Choose a coarser category.");
        var sizes = new int[levels.Length];
        foreach (int c in codes)
            sizes[c]++;
        string[] small = [.. levels.Where((_, k) => sizes[k] < FewestAmong)];
        if (small.Length == 0)
            return sample;
        notes.Add($"Too few records to judge among their like: {Say.List(small)}. They were left out.");
        return sample.Keep([.. codes.Select(c => sizes[c] >= FewestAmong)], $"fewer than {FewestAmong} of its {Among}");
    }

    /// <summary>Each vehicle by the median of its runs. Null, with a note, when there are too few vehicles to judge.</summary>
    private List<StandoutVehicle>? JudgeVehicles(Sample sample, double[][] values, IReadOnlyList<UnitReading>[] units, IReadOnlyDictionary<string, string?> unitOf, string like, List<string> notes, WorkContext work)
    {
        // a vehicle that runs in several levels is judged once in each: only there are its runs alike
        var (codes, levels) = Among is null ? (new int[sample.Count], new[] { "" }) : sample.Category(Among);
        var cells = Enumerable.Range(0, sample.Count).GroupBy(i => (Vehicle: sample.VehicleOf![i], Level: codes[i])).ToArray();
        double[][] medians = [.. values.Select(x => cells.Select(c => RobustScale.Median([.. c.Select(i => x[i])])).ToArray())];
        Judged judged;
        try
        {
            judged = Judged.Of(medians, Readings, Among is null ? null : [.. cells.Select(c => c.Key.Level)], levels.Length, "vehicles", Seed, work.Stage(0, 0.3, "judging vehicles"), work.Cancel);
        }
        catch (CannotAnswerException e)
        {
            notes.Add("Vehicles as a whole were not judged: " + e.Message);
            return null;
        }
        return [.. Enumerable.Range(0, cells.Length).Where(k => judged.Q[k] <= Cut).OrderByDescending(k => judged.Mcd.RawDistances[k])
            .DistinctBy(k => cells[k].Key.Vehicle)
            .Select(k =>
            {
                var blamed = judged.Cells(k, Readings, units, [], usual: null);
                return new StandoutVehicle(sample.VehicleNames![cells[k].Key.Vehicle], cells[k].Count(), 0, judged.Distance(k), judged.P[k], judged.Q[k], [.. blamed.Select(c => c.Column)])
                {
                    Details = blamed,
                    Why = StandoutWords.Why(blamed, unitOf, like),
                    Records = [.. cells[k].Select(sample.RecordAt)],
                };
            })];
    }

    private static int[][] RunsOf(Sample sample)
    {
        var runs = new List<int>[sample.VehicleCount!.Value];
        for (int i = 0; i < sample.Count; i++)
            (runs[sample.VehicleOf![i]] ??= []).Add(i);
        return [.. runs.Select(r => r.ToArray())];
    }

    /// <summary>The median of the vehicle's other runs, per reading; NaN below two of them.</summary>
    private static double[] Usual(double[][] values, int i, int[]? runs) =>
        [.. values.Select(x => runs is null || runs.Length < 3 ? double.NaN : RobustScale.Median([.. runs.Where(k => k != i).Select(k => x[k])]))];

    private List<PairCorrelation> Correlate(Sample sample, double[][] values, CancellationToken cancel)
    {
        if (sample.VehiclesRepeat)
            values = [.. values.Select(x => VehicleMedians(x, sample))];
        var rank = Correlations.Spearman(values, cancel);
        var linear = Correlations.Pearson(values, cancel);
        var pairs = new List<PairCorrelation>();
        for (int i = 1; i < values.Length; i++)
            for (int j = 0; j < i; j++)
                pairs.Add(new PairCorrelation(Readings[j], Readings[i], Finite(rank.R[i, j]), Finite(linear.R[i, j]), rank.N[i, j]));
        return pairs;
    }

    private static double[] VehicleMedians(double[] x, Sample sample)
    {
        var runs = new List<double>[sample.VehicleCount!.Value];
        for (int i = 0; i < x.Length; i++)
            if (!double.IsNaN(x[i]))
                (runs[sample.VehicleOf![i]] ??= []).Add(x[i]);
        return [.. runs.Select(r => r is null ? double.NaN : RobustScale.Median(System.Runtime.InteropServices.CollectionsMarshal.AsSpan(r)))];
    }

    private string LabelOf(Sample sample, int i) =>
        Label is null ? sample.LabelAt(i) : sample.Require(Label).TextAt(sample.Rows[i]) ?? $"record {sample.RecordAt(i)}";

    private static int IndexOf(Sample sample, int record) => Array.BinarySearch(sample.Rows, sample.Content.Numbers.RowOf(record));

    private static double? Finite(double r) => double.IsFinite(r) ? r : null;

    private static WithAndWithout Both(string column, double[] x, bool[] off)
    {
        double[] rest = [.. x.Where((_, i) => !off[i])];
        return new WithAndWithout(column, x.Length, Sums.Mean(x), Sd(x), RobustScale.Median(x), rest.Length, Sums.Mean(rest), Sd(rest), RobustScale.Median(rest));
    }

    private static double Sd(double[] x)
    {
        if (x.Length < 2)
            return double.NaN;
        double mean = Sums.Mean(x);
        return Math.Sqrt(Sums.Of(Array.ConvertAll(x, v => (v - mean) * (v - mean))) / (x.Length - 1));
    }

    private void AddNotes(Sample sample, bool byVehicle, bool onlyVehicles, int off, List<string> notes, RevisionContent content, List<StandoutExplanation> explanations)
    {
        if (Vehicles == VehicleUse.Ignore && content.FindRole(Records.Columns.ColumnRole.Vehicle) is not null)
            notes.Add("Every record stands alone, as asked: runs of one vehicle were not held together.");
        else if (byVehicle && !onlyVehicles)
            notes.Add("Runs of one vehicle are alike, so a vehicle that is different brings all of its runs along. Vehicles were therefore judged first, each by the median of its runs.");
        if (sample.Count >= 100_000)
            notes.Add("With so many records this is a ranking of the farthest, not an error rate: the smallest departure of the bulk from the assumed shape decides how many are named.");
        else if (off > sample.Count / 10)
            notes.Add($"{Say.Percent((double)off / sample.Count)} stand off: more than strays. There may be several kinds among the records; judge each among its like, or take a slice.");
        if (off > MostListed)
            notes.Add($"The list names the farthest {MostListed:N0} of {off:N0}.");
        if (Readings.Any(r => Unit.IsEconomy(content.Find(r)!.Unit)))
            notes.Add("A reading is distance per fuel, judged as it stands. Consumption is the better scale: far values of economy are stretched.");
        if (explanations.Any(e => e.Counted == "runs"))
            notes.Add("Where an attribute changes from run to run its shares count runs; runs of one vehicle are not independent, so take its p as a hint.");
        if (off > 0)
            notes.Add("Standing off is no reason to delete. Set a record aside only for a cause you can name; it stays in the run set with that reason.");
    }

    private List<string> Method(Sample sample, Judged judged, bool byVehicle) =>
    [
        $"Robust distance by the minimum covariance determinant over {judged.Mcd.H} of {judged.Mcd.N} {(byVehicle ? "runs" : "records")} (Rousseeuw and Van Driessen 1999; deterministic starts, Hubert, Rousseeuw and Verdonck 2012{(judged.Mcd.N <= judged.Mcd.Options.RandomUpTo ? $"; {judged.Mcd.Options.RandomSubsets} seeded random starts" : "")}) with consistency and small-sample factors (Pison, Van Aelst and Willems 2002).",
        $"Chances come from the scaled F distribution of Hardin and Rocke (2005); those named keep the false-discovery rate at {Say.Percent(Cut)} (Benjamini and Hochberg 1995).",
        Among is null ? "All were judged together." : $"Each was judged among its own {Among}: readings were first centred by the median of that level.",
        "A record's cells are named by leaving out, one by one, the reading whose removal brings it closest to the others. A slip of entry is a suspicion only: the value is far off, and would be ordinary without the slip.",
        "What stand-outs share: Fisher's exact test for each value of a category, the rank-sum test for a number, all adjusted together (Holm 1979).",
        sample.VehiclesRepeat ? "Correlations are those of the vehicles' medians." : "Correlations use every record that knows both readings.",
    ];
}
