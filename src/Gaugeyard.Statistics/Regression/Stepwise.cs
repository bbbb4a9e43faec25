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
            var state = reduced.At(model);
            var (rss, df) = (state.Rss, state.Df);
            double value = Value(options.Criterion, reduced.Count, rss, df);
            var candidates = new List<StepCandidate>();
            var freedom = new Dictionary<StepCandidate, int>();
            for (int t = 0; t < termCount; t++)
            {
                bool adds = !model.Contains(t);
                if (options.Keep.Contains(t) || (adds ? options.Direction == SelectionDirection.Backward : options.Direction == SelectionDirection.Forward))
                    continue;
                // a product enters after its parents, and a parent leaves after its products
                if (adds ? parents[t].Any(p => !model.Contains(p)) : model.Any(m => parents[m].Contains(t)))
                    continue;
                var (r, d) = adds ? state.With(t) : state.Without(t);
                var candidate = new StepCandidate(t, adds, options.Criterion == SelectionCriterion.PartialF
                    ? PartialP(adds ? rss : r, adds ? df : d, adds ? r : rss, adds ? d : df, reduced.Count)
                    : Value(options.Criterion, reduced.Count, r, d));
                candidates.Add(candidate);
                freedom[candidate] = d;
            }
            steps.Add(new SelectionStep(moved, added, value, candidates));
            // a perfect fit cannot be improved
            if (!seen.Add(string.Join(',', model.Order())) || (double.IsNegativeInfinity(value) && options.Direction != SelectionDirection.Backward))
                break;
            var best = options.Criterion == SelectionCriterion.PartialF ? BestByP(candidates, options) : BestByCriterion(candidates, value, freedom);
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

    private static StepCandidate? BestByCriterion(List<StepCandidate> candidates, double value, Dictionary<StepCandidate, int> freedom)
    {
        StepCandidate? best = null;
        int bestDf = 0;
        foreach (var c in candidates)
        {
            if (!(c.Value < value - Stop))
                continue;
            int df = freedom[c];
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

        /// <summary>The model with these terms, from which every neighbour is judged without a fit of its own.</summary>
        public State At(IReadOnlyCollection<int> model)
        {
            var inside = new List<int>();
            var outside = new List<int>();
            for (int j = 0; j < _columns.Length; j++)
                (_terms[j] < 0 || model.Contains(_terms[j]) ? inside : outside).Add(j);
            var qr = new HouseholderQr([.. inside.Select(j => (double[])_columns[j].Clone())], 1e-9);
            double[] y = _y[..^1];
            qr.ApplyTransposed(y);
            var rest = new Dictionary<int, List<double[]>>();
            foreach (int j in outside)
            {
                double[] c = (double[])_columns[j].Clone();
                qr.ApplyTransposed(c);
                if (!rest.TryGetValue(_terms[j], out var list))
                    rest[_terms[j]] = list = [];
                list.Add(c[qr.Rank..]);
            }
            double tail = _y[^1] * _y[^1];
            return new State(this, qr, [.. qr.Kept.Select(k => _terms[inside[k]])], y, rest, tail);
        }

        /// <summary>Sum of squares that counts as zero.</summary>
        internal double Floor => _floor;

        /// <summary>1 when the intercept was taken out by centring and is not among the columns.</summary>
        internal int HiddenIntercept => _ownIntercept ? 0 : 1;

        /// <summary>Residual sum of squares and number of coefficients of one model and of its neighbours.</summary>
        internal sealed class State
        {
            private readonly Reduced _of;
            private readonly HouseholderQr _qr;
            private readonly int[] _termOf;
            private readonly double[] _y;
            private readonly Dictionary<int, List<double[]>> _rest;
            private double[][]? _inverse;
            private double[]? _beta;

            public State(Reduced of, HouseholderQr qr, int[] termOf, double[] y, Dictionary<int, List<double[]>> rest, double tail)
            {
                (_of, _qr, _termOf, _y, _rest) = (of, qr, termOf, y, rest);
                double rss = tail;
                for (int i = qr.Rank; i < y.Length; i++)
                    rss += y[i] * y[i];
                Rss = rss <= of.Floor ? 0 : rss;
            }

            public double Rss { get; }

            public int Df => _qr.Rank + _of.HiddenIntercept;

            /// <summary>With one more term: the part of the residual that its columns, cleared of the model, explain.</summary>
            public (double Rss, int Df) With(int term)
            {
                if (!_rest.TryGetValue(term, out var columns))
                    return (Rss, Df);
                var qr = new HouseholderQr([.. columns.Select(c => (double[])c.Clone())], 1e-9);
                double[] y = _y[_qr.Rank..];
                qr.ApplyTransposed(y);
                double gain = 0;
                for (int i = 0; i < qr.Rank; i++)
                    gain += y[i] * y[i];
                double rss = Rss - gain;
                return (rss <= _of.Floor ? 0 : rss, Df + qr.Rank);
            }

            /// <summary>With one term less: its coefficients weighed by the inverse of their covariance.</summary>
            public (double Rss, int Df) Without(int term)
            {
                int[] own = [.. Enumerable.Range(0, _qr.Rank).Where(k => _termOf[k] == term)];
                if (own.Length == 0)
                    return (Rss, Df);
                _beta ??= _qr.Solve(_y);
                // rows of R^-1, of which the term's give the covariance of its coefficients
                if (_inverse is null)
                {
                    _inverse = new double[_qr.Rank][];
                    for (int k = 0; k < _qr.Rank; k++)
                    {
                        var unit = new double[_qr.Rank];
                        unit[k] = 1;
                        _inverse[k] = _qr.SolveTransposed(unit);
                    }
                }
                var qr = new HouseholderQr([.. own.Select(k => (double[])_inverse[k].Clone())], 0);
                double[] z = qr.SolveTransposed([.. own.Select(k => _beta[k])]);
                double loss = 0;
                foreach (double v in z)
                    loss += v * v;
                return (Rss + loss, Df - own.Length);
            }
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
