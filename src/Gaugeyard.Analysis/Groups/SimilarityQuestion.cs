using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Statistics.Multivariate;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Analysis.Groups;

/// <summary>Which groups are alike on several readings at once?</summary>
public sealed record SimilarityQuestion : Question<SimilarityAnswer>
{
    private const uint BootstrapTask = 0x51A1;
    private const int TreeResamples = 200;

    public IReadOnlyList<string> Readings { get; init; } = [];

    public string By { get; init; } = "";

    /// <summary>Number of permutations of the groups over vehicles; 0 for none.</summary>
    public int Permutations { get; init; } = 999;

    public override SimilarityAnswer Ask(RevisionContent content, WorkContext work)
    {
        if (Readings.Count < 2)
            throw new QuestionException("Name at least two readings: one alone is compared on its own.");
        if (Permutations is < 0 or > 99_999)
            throw new QuestionException($"permutations must lie between 0 and 99999 but is {Permutations}.");
        var sample = Sample.Of(content, this);
        double[][] columns = [.. Readings.Select(r => { sample.Number(r); return Array.Empty<double>(); })];
        sample = sample.Complete([.. Readings, By]);
        columns = [.. Readings.Select(sample.Number)];
        var (codes, levels) = sample.Category(By);
        var notes = new List<string>();
        double[][] rows = [.. Enumerable.Range(0, sample.Count).Select(i => columns.Select(c => c[i]).ToArray())];
        if (sample.VehicleOf is { } vehicleOf)
        {
            // one row per vehicle and group; a vehicle in several groups counts in each with its own mean
            var cells = Enumerable.Range(0, rows.Length).GroupBy(i => (Vehicle: vehicleOf[i], Group: codes[i])).ToArray();
            if (cells.Select(c => c.Key.Vehicle).Distinct().Count() < cells.Length)
                notes.Add("Some vehicles run in several groups and count once in each; the test treats those means as independent, so take its p with care.");
            rows = [.. cells.Select(c => columns.Select(x => c.Average(i => x[i])).ToArray())];
            codes = [.. cells.Select(c => c.Key.Group)];
            if (sample.VehiclesRepeat)
                notes.Add("Every figure acts on one mean per vehicle, since runs of one vehicle are not independent.");
        }
        var result = MultivariateComparison.Of(rows, codes, levels.Length);
        if (result.Reason is { } reason)
            throw new CannotAnswerException($"{reason} Take fewer readings, or groups with more {(sample.VehicleOf is null ? "records" : "vehicles")}.");
        double? permutationP = Permutations == 0 ? null : PermutationTest.Pillai(rows, codes, levels.Length, Permutations, Seed, work.Stage(0, 0.7, "permuting groups over vehicles"), work.Cancel);
        var tree = Tree(result.Distances, levels.Length);
        var support = Support(rows, codes, levels.Length, tree, work);
        var merges = tree.Select((m, i) => new WireMerge(Members(tree, m.Left, levels), Members(tree, m.Right, levels), m.Height, support?[i])).ToList();
        return new SimilarityAnswer
        {
            Headline = Headline(levels, result, merges),
            Basis = sample.Basis(),
            Statistics = new SimilarityStatistics(Wire(result.Pillai!), Wire(result.Wilks!), Wire(result.HotellingLawley!), Wire(result.Roy!)),
            PermutationP = permutationP,
            Canonical = [.. result.Canonical.Select(c => new WireVariate(c.Eigenvalue, c.Correlation, Readings.Zip(c.Coefficients).ToDictionary(x => x.First, x => x.Second), levels.Zip(c.Scores).ToDictionary(x => x.First, x => x.Second)))],
            Distances = [.. result.Distances.Select(d => new WireDistance(levels[d.A], levels[d.B], d.D, d.D2Unbiased))],
            Tree = merges,
            Notes = notes,
            Method =
            [
                "Multivariate analysis of variance: Pillai, Wilks (Rao's F), Hotelling-Lawley and Roy (an upper bound). Distances are Mahalanobis distances of group means by the pooled within-group covariance; d2Unbiased has its small-sample bias removed.",
                $"The tree joins the closest groups first (average linkage). Support is the share of {TreeResamples} resamples of {(sample.VehicleOf is null ? "records" : "vehicles")} within groups in which the same branch appears.",
                Permutations > 0 ? $"The permutation p-value comes from {Permutations} random assignments of the groups (Pillai's trace)." : "No permutations were asked for.",
            ],
        };
    }

    private static IReadOnlyList<TreeMerge> Tree(IReadOnlyList<GroupDistance> distances, int groups)
    {
        var d = new double[groups, groups];
        foreach (var x in distances)
            d[x.A, x.B] = d[x.B, x.A] = x.D;
        return AverageLinkage.Of(d);
    }

    private double[]? Support(double[][] rows, int[] codes, int groups, IReadOnlyList<TreeMerge> tree, WorkContext work)
    {
        int[][] members = [.. Enumerable.Range(0, groups).Select(g => Enumerable.Range(0, codes.Length).Where(i => codes[i] == g).ToArray())];
        if (members.Any(m => m.Length < 3))
            return null;
        var wanted = Branches(tree, groups);
        var seen = new int[tree.Count];
        int used = 0;
        for (int b = 0; b < TreeResamples; b++)
        {
            work.Cancel.ThrowIfCancellationRequested();
            work.Say(0.7 + 0.3 * b / TreeResamples, "resampling the tree");
            var random = new RandomStream(Seed, BootstrapTask, (ulong)b);
            var drawn = new double[rows.Length][];
            var drawnCodes = new int[rows.Length];
            int at = 0;
            for (int g = 0; g < groups; g++)
                foreach (int _ in members[g])
                {
                    drawn[at] = rows[members[g][random.NextInt(members[g].Length)]];
                    drawnCodes[at++] = g;
                }
            var result = MultivariateComparison.Of(drawn, drawnCodes, groups);
            if (result.Reason is not null)
                continue;
            used++;
            var branches = Branches(Tree(result.Distances, groups), groups).ToHashSet();
            for (int i = 0; i < wanted.Length; i++)
                if (branches.Contains(wanted[i]))
                    seen[i]++;
        }
        return used < TreeResamples / 2 ? null : [.. seen.Select(s => (double)s / used)];
    }

    private static string[] Branches(IReadOnlyList<TreeMerge> tree, int groups)
    {
        var sets = Enumerable.Range(0, groups).Select(g => new[] { g }).ToList();
        var names = new List<string>();
        foreach (var m in tree)
        {
            sets.Add([.. sets[m.Left].Concat(sets[m.Right]).Order()]);
            names.Add(string.Join(',', sets[^1]));
        }
        return [.. names];
    }

    private static List<string> Members(IReadOnlyList<TreeMerge> tree, int node, string[] levels) =>
        node < levels.Length ? [levels[node]] : [.. Members(tree, tree[node - levels.Length].Left, levels), .. Members(tree, tree[node - levels.Length].Right, levels)];

    private string Headline(string[] levels, MultivariateResult result, List<WireMerge> merges)
    {
        if (levels.Length == 2)
            return $"{levels[0]} and {levels[1]} lie {Say.Number(result.Distances[0].D, 1)} within-group spreads apart on {Say.List(Readings, 4)}.";
        var first = merges[0];
        var last = merges[^1];
        var apart = last.Left.Count <= last.Right.Count ? last.Left : last.Right;
        string alike = Say.List([.. first.Left, .. first.Right]);
        return $"{Say.Sentence(alike)} are most alike on {Say.List(Readings, 4)} ({Say.Number(first.Height, 1)} within-group spreads apart). {Say.Sentence(Say.List(apart))} {(apart.Count == 1 ? "stands" : "stand")} furthest from the rest ({Say.Number(last.Height, 1)}).";
    }

    private static WireMultivariate Wire(MultivariateStatistic s) => new(s.Value, s.F, s.Df1, s.Df2, s.P);
}

/// <summary>Which groups are alike.</summary>
public sealed record SimilarityAnswer : Answer
{
    public required SimilarityStatistics Statistics { get; init; }

    public double? PermutationP { get; init; }

    public required IReadOnlyList<WireVariate> Canonical { get; init; }

    public required IReadOnlyList<WireDistance> Distances { get; init; }

    public required IReadOnlyList<WireMerge> Tree { get; init; }
}

public sealed record SimilarityStatistics(WireMultivariate Pillai, WireMultivariate Wilks, WireMultivariate HotellingLawley, WireMultivariate Roy);

public sealed record WireMultivariate(double Value, double F, double Df1, double Df2, double P);

public sealed record WireVariate(double Eigenvalue, double Correlation, IReadOnlyDictionary<string, double> Coefficients, IReadOnlyDictionary<string, double> Scores);

public sealed record WireDistance(string A, string B, double D, double D2Unbiased);

/// <summary>One branch: the groups on either side, the distance at which they join, and the share of resamples that show it.</summary>
public sealed record WireMerge(IReadOnlyList<string> Left, IReadOnlyList<string> Right, double Height, double? Support);
