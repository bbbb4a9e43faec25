using System.Text.Json.Serialization;
using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Gaugeyard.Statistics.Comparing;
using Gaugeyard.Statistics.Describing;

namespace Gaugeyard.Analysis.Groups;

/// <summary>How pairs are compared, as the interface calls it.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<PairWay>))]
public enum PairWay
{
    [JsonStringEnumMemberName("games-howell")] GamesHowell,
    [JsonStringEnumMemberName("tukey-kramer")] TukeyKramer,
    [JsonStringEnumMemberName("holm-welch")] HolmWelch,
}

/// <summary>Which groups differ on a reading?</summary>
public sealed record ComparisonQuestion : Question<ComparisonAnswer>
{
    private const int MostGroups = 60;

    public string Reading { get; init; } = "";

    /// <summary>The grouping column.</summary>
    public string By { get; init; } = "";

    public PairWay Pairs { get; init; }

    /// <summary>Two groups are called the same when their difference surely lies within -/+ this much, in the reading's unit.</summary>
    public double? Margin { get; init; }

    public override ComparisonAnswer Ask(RevisionContent content, WorkContext work)
    {
        if (Margin is <= 0)
            throw new QuestionException($"The margin must be above 0 but is {Margin}.");
        var sample = Sample.Of(content, this);
        sample.Number(Reading);
        sample = sample.Complete(Reading, By);
        var (codes, levels) = sample.Category(By);
        if (levels.Length < 2)
            throw new CannotAnswerException($"Only {(levels.Length == 0 ? "no group" : $"one group, '{levels[0]}',")} has values of {Reading}, so there is nothing to compare. Choose another column or widen the slice.");
        if (levels.Length > MostGroups)
            throw new CannotAnswerException($"{By} has {levels.Length} groups; pairs can be compared for at most {MostGroups}. Choose a coarser column, or a slice with fewer groups.");
        double[] values = sample.Number(Reading);
        var notes = new List<string>();
        string? unit = content.Find(Reading)!.Unit;
        if (Unit.IsEconomy(unit))
            notes.Add($"{Reading} is distance per fuel; the comparison takes its own numbers. Consumption is the better scale: the same difference in {Unit.LabelOf(unit)} means more fuel at the thirsty end.");
        if (Vehicles == VehicleUse.Ignore && content.FindRole(ColumnRole.Vehicle) is not null)
            notes.Add("Vehicles are ignored as asked: every record counts as independent.");
        return sample.VehicleOf is { } vehicleOf && Crossed(codes, vehicleOf)
            ? Within(sample, values, codes, levels, unit, notes)
            : Between(sample, values, codes, levels, unit, notes);
    }

    private static bool Crossed(int[] codes, int[] vehicles)
    {
        var group = new Dictionary<int, int>();
        for (int i = 0; i < codes.Length; i++)
            if (!group.TryAdd(vehicles[i], codes[i]) && group[vehicles[i]] != codes[i])
                return true;
        return false;
    }

    // each vehicle belongs to one group: independent groups of vehicle means (or of records where vehicles are not told apart)
    private ComparisonAnswer Between(Sample sample, double[] values, int[] codes, string[] levels, string? unit, List<string> notes)
    {
        var groups = new double[levels.Length][];
        for (int g = 0; g < levels.Length; g++)
        {
            int[] rows = [.. Enumerable.Range(0, codes.Length).Where(i => codes[i] == g)];
            double[] runs = [.. rows.Select(i => values[i])];
            groups[g] = sample.VehicleOf is { } of ? VehicleMean.OfEach(runs, [.. rows.Select(i => of[i])]).Means : runs;
        }
        string what = sample.VehicleOf is null ? "record" : "vehicle";
        int[] small = [.. Enumerable.Range(0, levels.Length).Where(g => groups[g].Length < 2)];
        int[] large = [.. Enumerable.Range(0, levels.Length).Where(g => groups[g].Length >= 2)];
        if (large.Length < 2)
            throw new CannotAnswerException($"A comparison needs two groups with at least two {what}s each; {Say.List([.. small.Select(g => levels[g])], 4)} {(small.Length == 1 ? "has" : "have")} only one. Test another {what} of each, or choose a coarser column.");
        if (small.Length > 0)
            notes.Add($"{Say.List([.. small.Select(g => levels[g])], 4)} {(small.Length == 1 ? "has" : "have")} only one {what} and {(small.Length == 1 ? "is" : "are")} left out: the spread between {what}s cannot be seen from one.");
        double[][] compared = [.. large.Select(g => groups[g])];
        string[] names = [.. large.Select(g => levels[g])];
        var tests = new ComparisonTests(WireTest.Of(OneWay.Classical(compared)), WireTest.Of(OneWay.Welch(compared)), WireTest.Of(OneWay.BrownForsythe(compared)), WireTest.Of(OneWay.KruskalWallis(compared)), WireTest.Of(OneWay.LeveneMedian(compared)));
        var method = Pairs switch { PairWay.TukeyKramer => PairMethod.TukeyKramer, PairWay.HolmWelch => PairMethod.HolmWelch, _ => PairMethod.GamesHowell };
        var results = PairComparisons.Of(compared, method, Confidence);
        var pairs = results.Select(p => new ComparedPair(names[p.A], names[p.B], p.Difference, Finite(p.StandardError), Finite(p.Df), Finite(p.Low), Finite(p.High), Finite(p.P), Finite(p.HedgesG)) { HedgesGLow = Finite(p.GLow), HedgesGHigh = Finite(p.GHigh) }).ToList();
        double[] means = [.. compared.Select(g => Statistics.Numerics.Sums.Mean(g))];
        if (sample.VehiclesRepeat)
            notes.Add("Every test acts on one mean per vehicle, since runs of one vehicle are not independent.");
        var (between, within) = OneWay.Squares(compared);
        double total = compared.Sum(g => g.Length), meanWithin = within / (total - compared.Length);
        return Finish(sample, names, means, tests, pairs, unit, notes, method == PairMethod.HolmWelch) with
        {
            OmegaSquared = Finite((between - (compared.Length - 1) * meanWithin) / (between + within + meanWithin)),
            Equivalence = Margin is null ? null : [.. Equivalence(compared, method, results, names)],
        };
    }

    // vehicles run in several groups: each is compared with itself
    private ComparisonAnswer Within(Sample sample, double[] values, int[] codes, string[] levels, string? unit, List<string> notes)
    {
        int vehicles = sample.VehicleCount!.Value;
        var means = new double[levels.Length][];
        for (int g = 0; g < levels.Length; g++)
        {
            means[g] = new double[vehicles];
            Array.Fill(means[g], double.NaN);
            int[] rows = [.. Enumerable.Range(0, codes.Length).Where(i => codes[i] == g)];
            var (m, at) = VehicleMean.OfEach([.. rows.Select(i => values[i])], [.. rows.Select(i => sample.VehicleOf![i])]);
            for (int k = 0; k < at.Length; k++)
                means[g][at[k]] = m[k];
        }
        notes.Add("Vehicles run in more than one of these groups, so each is compared with itself: differences are those of vehicles that ran in both groups, paired.");
        var pairs = new List<ComparedPair>();
        var unpaired = new HashSet<int>(Enumerable.Range(0, vehicles));
        var refused = new List<string>();
        int family = levels.Length * (levels.Length - 1) / 2;
        for (int a = 0; a < levels.Length; a++)
            for (int b = a + 1; b < levels.Length; b++)
            {
                int[] both = [.. Enumerable.Range(0, vehicles).Where(v => !double.IsNaN(means[a][v]) && !double.IsNaN(means[b][v]))];
                foreach (int v in both)
                    unpaired.Remove(v);
                if (both.Length < 2)
                {
                    refused.Add($"{levels[a]} and {levels[b]}");
                    continue;
                }
                var d = Summary.Of([.. both.Select(v => means[b][v] - means[a][v])], 1 - (1 - Confidence) / family);
                double t = d.Mean.Mean / d.Mean.StandardError;
                double p = d.Mean.StandardError == 0 ? (d.Mean.Mean == 0 ? 1 : 0) : Statistics.Numerics.Probability.StudentTwoSided(t, d.Mean.Df);
                pairs.Add(new ComparedPair(levels[a], levels[b], d.Mean.Mean, Finite(d.Mean.StandardError), Finite(d.Mean.Df), Finite(d.Mean.Low), Finite(d.Mean.High), Finite(p), Finite(d.Mean.Mean / d.StandardDeviation)));
            }
        if (pairs.Count == 0)
            throw new CannotAnswerException($"Vehicles run in several levels of {By}, but no two levels share two vehicles, so they cannot be compared within vehicles. Run at least two vehicles in both.");
        if (refused.Count > 0)
            notes.Add($"Not compared, since fewer than two vehicles ran in both: {Say.List(refused, 4)}.");
        if (unpaired.Count > 0)
            notes.Add($"{Say.Count(unpaired.Count, "vehicle")} ran in only one of the groups and {(unpaired.Count == 1 ? "does" : "do")} not enter a paired difference.");
        double[] adjusted = PairComparisons.Holm([.. pairs.Select(p => p.P ?? 1)]);
        for (int i = 0; i < pairs.Count; i++)
            pairs[i] = pairs[i] with { P = adjusted[i] };
        var none = new WireTest(null, null, null, null) { Reason = "vehicles run in several groups, so the groups are not independent" };
        double[] overall = [.. means.Select(m => Statistics.Numerics.Sums.Mean([.. m.Where(v => !double.IsNaN(v))]))];
        return Finish(sample, levels, overall, new ComparisonTests(none, none, none, none, none), pairs, unit, notes, true);
    }

    private ComparisonAnswer Finish(Sample sample, string[] levels, double[] means, ComparisonTests tests, List<ComparedPair> pairs, string? unit, List<string> notes, bool holm)
    {
        double alpha = 1 - Confidence;
        bool Different(int i, int j) => pairs.Exists(p => p.P < alpha && ((p.A == levels[i] && p.B == levels[j]) || (p.A == levels[j] && p.B == levels[i])));
        string[] letters = LetterDisplay.Of(means, Different);
        if (holm)
            notes.Add("Holm's p-values have no simple matching intervals: the intervals shown are Bonferroni's and can disagree with them.");
        return new ComparisonAnswer
        {
            Headline = Headlines.Comparison(Reading, unit, levels, means, pairs, alpha, sample.VehicleOf is not null),
            Basis = sample.Basis(),
            Tests = tests,
            Pairs = pairs,
            Letters = levels.Select((l, i) => (l, letters[i])).ToDictionary(x => x.l, x => x.Item2),
            Family = pairs.Count,
            Notes = notes,
            Method =
            [
                $"All {Say.Count(pairs.Count, "pair")} are judged together, so that the chance of any false difference is at most {Say.Percent(alpha)}. Groups that share a letter are not told apart (Piepho 2004).",
                "Tests of means: classical one-way, Welch (1951), Brown and Forsythe (1974), Kruskal and Wallis (1952); of spread: about the median (Brown and Forsythe 1974). They inform; unequal variances are assumed by default.",
                "A difference describes the vehicles, drivers and conditions tested. What was not controlled may explain it.",
            ],
        };
    }

    private IEnumerable<WireEquivalence> Equivalence(double[][] groups, PairMethod method, IReadOnlyList<PairResult> wide, string[] names)
    {
        // two one-sided tests at level alpha each are the interval of confidence 1 - 2 alpha
        var narrow = PairComparisons.Of(groups, method, 1 - 2 * (1 - Confidence));
        foreach (var (n, w) in narrow.Zip(wide))
        {
            bool same = n.Low > -Margin && n.High < Margin, different = w.P < 1 - Confidence;
            yield return new WireEquivalence(names[n.A], names[n.B], Finite(n.Low), Finite(n.High), same ? (different ? "same and different" : "same") : different ? "different" : "not decided");
        }
    }

    private static double? Finite(double value) => double.IsFinite(value) ? value : null;
}

/// <summary>Which groups differ.</summary>
public sealed record ComparisonAnswer : Answer
{
    public required ComparisonTests Tests { get; init; }

    public required IReadOnlyList<ComparedPair> Pairs { get; init; }

    /// <summary>Letters by level: groups that share one are not told apart.</summary>
    public required IReadOnlyDictionary<string, string> Letters { get; init; }

    /// <summary>Number of statements that hold together.</summary>
    public int Family { get; init; }

    public double? OmegaSquared { get; init; }

    public IReadOnlyList<WireEquivalence>? Equivalence { get; init; }
}

public sealed record ComparisonTests(WireTest Classical, WireTest Welch, WireTest BrownForsythe, WireTest KruskalWallis, WireTest LeveneMedian);

/// <summary>One test; null figures come with a reason.</summary>
public sealed record WireTest(double? Statistic, double? Df1, double? Df2, double? P)
{
    public string? Reason { get; init; }

    internal static WireTest Of(TestResult r) => new(Finite(r.Statistic), Finite(r.Df1), Finite(r.Df2), Finite(r.P)) { Reason = r.Reason };

    private static double? Finite(double value) => double.IsFinite(value) ? value : null;
}

/// <summary>One pair of groups; the difference is b minus a.</summary>
public sealed record ComparedPair(string A, string B, double Difference, double? Se, double? Df, double? Low, double? High, double? P, double? HedgesG)
{
    public double? HedgesGLow { get; init; }

    public double? HedgesGHigh { get; init; }
}

/// <summary>Whether two groups are the same within the margin.</summary>
public sealed record WireEquivalence(string A, string B, double? Low, double? High, string Verdict);
