using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Regression;

/// <summary>What a selection minimises.</summary>
public enum SelectionCriterion
{
    Aicc,
    Aic,
    Bic,

    /// <summary>Enter below one p-value, leave above another.</summary>
    PartialF,
}

/// <summary>Which way a selection goes.</summary>
public enum SelectionDirection
{
    Forward,
    Backward,
    Both,
}

/// <summary>Settings of a selection.</summary>
public sealed record StepwiseOptions
{
    public SelectionCriterion Criterion { get; init; } = SelectionCriterion.Aicc;

    public SelectionDirection Direction { get; init; } = SelectionDirection.Both;

    /// <summary>Whether to start with all terms; backward always does.</summary>
    public bool StartWithAll { get; init; }

    /// <summary>Terms that stay in the model.</summary>
    public IReadOnlySet<int> Keep { get; init; } = new HashSet<int>();

    /// <summary>A term enters when its p is below this (partial F).</summary>
    public double EnterP { get; init; } = 0.05;

    /// <summary>A term leaves when its p is above this (partial F); above EnterP, so that the selection ends.</summary>
    public double LeaveP { get; init; } = 0.10;
}

/// <summary>One candidate move at a step, with the criterion it would give (for partial F the p-value).</summary>
public sealed record StepCandidate(int Term, bool Adds, double Value);

/// <summary>One step: the move taken (null for the start), the criterion after it, and every candidate judged next.</summary>
public sealed record SelectionStep(int? Term, bool Adds, double Value, IReadOnlyList<StepCandidate> Candidates);

/// <summary>Course and outcome of a selection.</summary>
public sealed record SelectionPath(IReadOnlyList<SelectionStep> Steps, IReadOnlyList<int> Chosen);

/// <summary>
/// Stepwise selection of whole terms (Efroymson 1960). The data are reduced once to their triangular factor; every candidate is
/// then judged by an orthogonal fit within it, so all are judged on the same records and to the accuracy of a QR fit.
/// </summary>
public static class Stepwise
{
    private const double Stop = 1e-7;

    /// <summary>Selects among terms.</summary>
    /// <param name="columns">Columns of every candidate term, kept terms included.</param>
    /// <param name="termCount">Number of terms.</param>
    /// <param name="parents">For each term the terms that must be in before it (products); empty for most.</param>
    /// <param name="y">The reading.</param>
    /// <param name="intercept">The intercept column where it is not constant (transformed data); null for ones.</param>
    public static SelectionPath Select(
        IReadOnlyList<(int Term, double[] Values)> columns, int termCount, IReadOnlyList<IReadOnlyList<int>> parents, double[] y, StepwiseOptions options, double[]? intercept = null, CancellationToken cancel = default)
    {
        if (options.Criterion == SelectionCriterion.PartialF && !(options.EnterP < options.LeaveP))
            throw new ArgumentException($"the p to enter ({options.EnterP}) must be below the p to leave ({options.LeaveP})", nameof(options));
        var reduced = new Reduced(columns, y, intercept, cancel);
        var model = new HashSet<int>(options.Keep);
        if (options.Direction == SelectionDirection.Backward || options.StartWithAll)
            model.UnionWith(Enumerable.Range(0, termCount));
        var steps = new List<SelectionStep>();
        var seen = new HashSet<string>();
        int? moved = null;
        bool added = false;
        while (true)
        {
            cancel.ThrowIfCancellationRequested();
            var (rss, df) = reduced.Fit(model);
            double value = Value(options.Criterion, reduced.Count, rss, df);
            var candidates = new List<StepCandidate>();
            for (int t = 0; t < termCount; t++)
            {
                bool adds = !model.Contains(t);
                if (options.Keep.Contains(t) || (adds ? options.Direction == SelectionDirection.Backward : options.Direction == SelectionDirection.Forward))
                    continue;
                // a product enters after its parents, and a parent leaves after its products
                if (adds ? parents[t].Any(p => !model.Contains(p)) : model.Any(m => parents[m].Contains(t)))
                    continue;
                var (r, d) = reduced.Fit(adds ? [.. model, t] : [.. model.Where(m => m != t)]);
                candidates.Add(new StepCandidate(t, adds, options.Criterion == SelectionCriterion.PartialF
                    ? PartialP(adds ? rss : r, adds ? df : d, adds ? r : rss, adds ? d : df, reduced.Count)
                    : Value(options.Criterion, reduced.Count, r, d)));
            }
            steps.Add(new SelectionStep(moved, added, value, candidates));
            // a perfect fit cannot be improved
            if (!seen.Add(string.Join(',', model.Order())) || (double.IsNegativeInfinity(value) && options.Direction != SelectionDirection.Backward))
                break;
            var best = options.Criterion == SelectionCriterion.PartialF ? BestByP(candidates, options) : BestByCriterion(candidates, value, reduced, model);
            if (best is null)
                break;
            (moved, added) = (best.Term, best.Adds);
            if (best.Adds)
                model.Add(best.Term);
            else
                model.Remove(best.Term);
        }
        return new SelectionPath(steps, [.. model.Order()]);
    }

    private static StepCandidate? BestByCriterion(List<StepCandidate> candidates, double value, Reduced reduced, HashSet<int> model)
    {
        StepCandidate? best = null;
        int bestDf = 0;
        foreach (var c in candidates)
        {
            if (!(c.Value < value - Stop))
                continue;
            int df = reduced.Fit(c.Adds ? [.. model, c.Term] : [.. model.Where(m => m != c.Term)]).Df;
            double tie = 1e-9 * Math.Max(1, Math.Abs(c.Value));
            // ties go to fewer degrees of freedom, then to the user's order
            if (best is null || c.Value < best.Value - tie || (Math.Abs(c.Value - best.Value) <= tie && df < bestDf))
                (best, bestDf) = (c, df);
        }
        return best;
    }

    private static StepCandidate? BestByP(List<StepCandidate> candidates, StepwiseOptions options)
    {
        var leave = candidates.Where(c => !c.Adds && c.Value > options.LeaveP).MaxBy(c => c.Value);
        return leave ?? candidates.Where(c => c.Adds && c.Value < options.EnterP).MinBy(c => c.Value);
    }

    private static double PartialP(double rssSmall, int dfSmall, double rssLarge, int dfLarge, int n)
    {
        int d1 = dfLarge - dfSmall, d2 = n - dfLarge;
        if (d1 <= 0 || d2 <= 0)
            return 1;
        return rssLarge <= 0 ? 0 : Probability.FisherUpper((rssSmall - rssLarge) / d1 / (rssLarge / d2), d1, d2);
    }

    /// <summary>n ln(RSS / n) + penalty; constants that are the same for all models are left out.</summary>
    /// <param name="df">Coefficients with the intercept.</param>
    internal static double Value(SelectionCriterion criterion, int n, double rss, int df)
    {
        double k = df + 1, rest = n - k - 1;
        double penalty = criterion switch
        {
            SelectionCriterion.Aic => 2.0 * df,
            SelectionCriterion.Bic => Math.Log(n) * df,
            SelectionCriterion.Aicc => rest > 0 ? 2 * k + 2 * k * (k + 1) / rest : double.PositiveInfinity,
            _ => 0,
        };
        return n * Math.Log(rss / n) + penalty;
    }

    /// <summary>The data reduced to the triangular factor of all columns and the reading, with the fits asked of it so far.</summary>
    internal sealed class Reduced
    {
        private readonly double[][] _columns;
        private readonly int[] _terms;
        private readonly double[] _y;
        private readonly double _floor;
        private readonly bool _ownIntercept;
        private readonly Dictionary<string, (double, int)> _fits = [];

        public Reduced(IReadOnlyList<(int Term, double[] Values)> columns, double[] y, double[]? intercept, CancellationToken cancel)
        {
            Count = y.Length;
            _ownIntercept = intercept is not null;
            var all = new List<double[]>();
            var terms = new List<int>();
            if (intercept is not null)
            {
                all.Add(Unit(intercept, 0));
                terms.Add(-1);
            }
            foreach (var (term, values) in columns)
            {
                all.Add(Unit(values, intercept is null ? Sums.Mean(values) : 0));
                terms.Add(term);
            }
            double centre = intercept is null ? Sums.Mean(y) : 0;
            double[] target = [.. y.Select(v => v - centre)];
            double scale = HouseholderQr.Norm(target);
            _floor = scale * scale * 1e-30;
            // every column, aliased ones too, is rotated into the space of the independent ones plus one direction for the rest
            var copies = all.Select(c => (double[])c.Clone()).ToArray();
            var qr = new HouseholderQr([.. copies], 1e-11, cancel);
            int rank = qr.Rank;
            _columns = new double[all.Count][];
            Parallel.For(0, all.Count, j =>
            {
                double[] c = (double[])all[j].Clone();
                qr.ApplyTransposed(c);
                _columns[j] = c[..Math.Min(rank, c.Length)];
            });
            qr.ApplyTransposed(target);
            _y = [.. target[..Math.Min(rank, target.Length)], HouseholderQr.Norm(target.AsSpan(Math.Min(rank, target.Length)))];
            _terms = [.. terms];
        }

        public int Count { get; }

        /// <summary>Residual sum of squares and number of coefficients (with the intercept) of the model with these terms.</summary>
        public (double Rss, int Df) Fit(IReadOnlyCollection<int> model)
        {
            string key = string.Join(',', model.Order());
            if (_fits.TryGetValue(key, out var known))
                return known;
            var chosen = new List<double[]>();
            for (int j = 0; j < _columns.Length; j++)
                if (_terms[j] < 0 || model.Contains(_terms[j]))
                    chosen.Add((double[])_columns[j].Clone());
            double[] rest = (double[])_y.Clone();
            double tail = rest[^1];
            double[] head = rest[..^1];
            int rank = 0;
            if (chosen.Count > 0 && head.Length > 0)
            {
                var qr = new HouseholderQr([.. chosen], 1e-9);
                qr.ApplyTransposed(head);
                rank = qr.Rank;
            }
            double rss = tail * tail;
            for (int i = rank; i < head.Length; i++)
                rss += head[i] * head[i];
            return _fits[key] = (rss <= _floor ? 0 : rss, rank + (_ownIntercept ? 0 : 1));
        }

        private static double[] Unit(double[] values, double centre)
        {
            double[] c = [.. values.Select(v => v - centre)];
            double norm = HouseholderQr.Norm(c);
            if (!(norm > 1e-13 * Math.Abs(centre) * Math.Sqrt(values.Length)))
                return new double[values.Length];
            for (int i = 0; i < c.Length; i++)
                c[i] /= norm;
            return c;
        }
    }
}
