using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Smoothing;

/// <summary>
/// Local regression, fitted directly at every point (Cleveland 1979, JASA 74:829-836; Cleveland and Devlin 1988, JASA 83:596-610):
/// tricube weights over the q = floor(n span + 1e-5) nearest records. With two or more predictors each is divided by its 10 %
/// trimmed standard deviation. O(q) per point with one predictor, O(n + q terms^2) with more. Immutable after construction; safe
/// to evaluate from any thread.
/// </summary>
public sealed class LocalRegression
{
    /// <summary>
    /// Beyond this many records the figures over all records (not the curve itself) rest on fits at 400 of them, spread evenly
    /// by rank, with straight lines between.
    /// </summary>
    public const int Thinned = 40_000;

    private const int Places = 400;
    private readonly double[][] _x;
    private readonly double[] _y;
    private readonly double[]? _prior;
    private readonly double[] _scales;
    private readonly int[] _order = [];
    private SortedLine? _line;
    private double[]? _robust;

    private LocalRegression(double[][] predictors, double[] y, double[]? weights, LocalRegressionOptions options)
    {
        (_y, _prior, Options) = (y, weights, options);
        _scales = [.. predictors.Select(p => predictors.Length == 1 ? 1 : TrimmedScale(p))];
        Neighbours = NeighboursOf(Count, options.Span);
        if (predictors.Length == 1)
        {
            _x = predictors;
            _order = [.. Enumerable.Range(0, Count)];
            Array.Sort((double[])predictors[0].Clone(), _order);
            _line = Line(_y, _prior);
        }
        else
        {
            _x = [.. predictors.Select((p, j) => p.Select(v => v / _scales[j]).ToArray())];
        }
    }

    /// <summary>Settings of the fit.</summary>
    public LocalRegressionOptions Options { get; }

    /// <summary>Number of records.</summary>
    public int Count => _y.Length;

    /// <summary>Records in each neighbourhood.</summary>
    public int Neighbours { get; }

    /// <summary>Coefficients of the local polynomial.</summary>
    public int Terms => TermCount(_x.Length, Options.Degree);

    /// <summary>Number of coefficients of a polynomial.</summary>
    public static int TermCount(int predictors, int degree) => LocalSolve.TermCount(predictors, degree);

    /// <summary>Weight of each record after the robust passes; null without them.</summary>
    public IReadOnlyList<double>? RobustWeights => _robust;

    /// <summary>Sets up a fit.</summary>
    /// <param name="predictors">1 to 4 columns of n finite values.</param>
    /// <param name="y">n finite values.</param>
    /// <param name="weights">n positive weights, or null.</param>
    /// <returns>The fit, or the reason why the data cannot carry it.</returns>
    /// <exception cref="ArgumentException">Lengths differ, a value is not finite, a weight is not positive, or an option is out of range.</exception>
    public static (LocalRegression? Fit, string? Reason) Of(double[][] predictors, double[] y, LocalRegressionOptions options, double[]? weights = null, CancellationToken cancel = default)
    {
        if (predictors.Length is < 1 or > 4)
            throw new ArgumentException($"local regression takes 1 to 4 predictors but got {predictors.Length}", nameof(predictors));
        if (options.Degree is < 0 or > 2 || !(options.Span > 0) || double.IsInfinity(options.Span))
            throw new ArgumentException($"degree must be 0, 1 or 2 and span above 0 but are {options.Degree} and {options.Span}", nameof(options));
        foreach (double[] p in predictors)
            if (p.Length != y.Length)
                throw new ArgumentException($"predictors must have length {y.Length} but one has {p.Length}", nameof(predictors));
        if (weights is not null && weights.Length != y.Length)
            throw new ArgumentException($"weights must have length {y.Length} but has {weights.Length}", nameof(weights));
        if (weights?.Any(w => !(w > 0) || double.IsInfinity(w)) == true)
            throw new ArgumentException("weights must be positive and finite", nameof(weights));
        if (predictors.Append(y).Any(c => c.Any(v => !double.IsFinite(v))))
            throw new ArgumentException("predictors and readings must be finite", nameof(predictors));
        if (y.Length == 0)
            return (null, "there are no records");
        foreach (double[] p in predictors)
            if (p.All(v => v == p[0]))
                return (null, "a predictor has the same value in every record");
        var fit = new LocalRegression(predictors, y, weights, options);
        if (fit._scales.Any(s => !(s > 0)))
            return (null, "a predictor has the same value in nearly every record");
        if (fit.Neighbours < fit.Terms)
            return (null, $"a span of {options.Span:0.###} takes {fit.Neighbours} of {y.Length} records into each neighbourhood, too few for a local polynomial of degree {options.Degree} with {fit.Terms} coefficients");
        if (options.Robust)
            fit.Reweigh(cancel);
        return (fit, null);
    }

    /// <summary>Records in each neighbourhood of n.</summary>
    internal static int NeighboursOf(long n, double span) => (int)Math.Min(n, Math.Floor(n * span + 1e-5));

    private void Reweigh(CancellationToken cancel)
    {
        for (int pass = 0; pass < 3; pass++)
        {
            double[] size = Sizes(FittedValues(cancel));
            double cut = 6 * Quantiles.Median(size);
            if (!(cut > 1e-300))
                return;
            _robust = [.. size.Select(r => r <= 0.001 * cut ? 1 : r > 0.999 * cut ? 0 : Math.Pow(1 - r / cut * (r / cut), 2))];
            if (_x.Length == 1)
                _line = Line(_y, _prior is null ? _robust : [.. _robust.Select((r, i) => r * _prior[i])]);
        }
    }

    private double[] Sizes(double[] fitted) => [.. fitted.Select((f, i) => Math.Abs(_y[i] - f) * Math.Sqrt(_prior?[i] ?? 1))];

    private SortedLine Line(double[] y, double[]? weights) =>
        new([.. _order.Select(i => _x[0][i])], [.. _order.Select(i => y[i])], weights is null ? null : [.. _order.Select(i => weights[i])], Options.Degree);

    private LineFit FitLine(SortedLine line, double at, int exclude = -1) =>
        line.Fit(at, Stretch(line.Bandwidth(at, exclude < 0 ? Neighbours : NeighboursOf(Count - 1, Options.Span), exclude)), exclude);

    private double Stretch(double h) => Options.Span > 1 ? h * Math.Pow(Options.Span, 1.0 / _x.Length) : h;

    /// <summary>Fitted value at every record; NaN where its neighbourhood cannot carry the polynomial.</summary>
    public double[] FittedValues(CancellationToken cancel = default)
    {
        var fitted = new double[Count];
        if (_line is not null)
        {
            double[] values = [.. AlongLine(_line, cancel).Select(f => f.Value)];
            for (int k = 0; k < Count; k++)
                fitted[_order[k]] = values[k];
            return fitted;
        }
        Parallel.For(0, Count, Threads(cancel), i => fitted[i] = Scaled(At(i)));
        return fitted;
    }

    // fits at every record, sorted; beyond the limit at evenly spread places with the value and own weight drawn between
    private LineFit[] AlongLine(SortedLine line, CancellationToken cancel)
    {
        var fits = new LineFit[Count];
        if (Count <= Thinned)
        {
            Parallel.For(0, Count, Threads(cancel), k => fits[k] = FitLine(line, line.X[k]));
            return fits;
        }
        int[] places = [.. Enumerable.Range(0, Places).Select(j => (int)((long)j * (Count - 1) / (Places - 1)))];
        var knots = new LineFit[Places];
        Parallel.For(0, Places, Threads(cancel), j =>
        {
            var fit = FitLine(line, line.X[places[j]]);
            knots[j] = fit.Weights is { } w ? fit with { A0 = w[places[j] - fit.First], Weights = null } : fit;
        });
        for (int j = 0; j + 1 < Places; j++)
            for (int k = places[j]; k <= places[j + 1]; k++)
            {
                double gap = line.X[places[j + 1]] - line.X[places[j]], t = gap > 0 ? (line.X[k] - line.X[places[j]]) / gap : 0;
                fits[k] = knots[j] with { Value = knots[j].Value + t * (knots[j + 1].Value - knots[j].Value), A0 = knots[j].A0 + t * (knots[j + 1].A0 - knots[j].A0) };
            }
        return fits;
    }

    /// <summary>Value at each record from a fit without that record: the neighbourhood moves, q = floor((n - 1) span + 1e-5). Robust weights stay.</summary>
    public double[] LeaveOneOut(CancellationToken cancel = default)
    {
        var values = new double[Count];
        if (_line is { } line)
            Parallel.For(0, Count, Threads(cancel), k => values[_order[k]] = FitLine(line, line.X[k], exclude: k).Value);
        else
            Parallel.For(0, Count, Threads(cancel), i => values[i] = Without(i));
        return values;
    }

    // several predictors are scaled anew without the record, as a refit would
    private double Without(int i)
    {
        int[] rest = [.. Enumerable.Range(0, Count).Where(k => k != i)];
        double[][] raw = [.. _x.Select((c, j) => rest.Select(k => c[k] * _scales[j]).ToArray())];
        var fit = new LocalRegression(raw, [.. rest.Select(k => _y[k])], _prior is null ? null : [.. rest.Select(k => _prior[k])], Options) { _robust = _robust is null ? null : [.. rest.Select(k => _robust[k])] };
        double[] at = [.. _x.Select((c, j) => c[i] * _scales[j])];
        return fit.Neighbours < fit.Terms ? double.NaN : fit.Evaluate(at);
    }

    /// <summary>Value at a point in the predictors' own units; NaN where the neighbourhood cannot carry the polynomial.</summary>
    public double Evaluate(ReadOnlySpan<double> at)
    {
        CheckPoint(at);
        return _line is not null ? FitLine(_line, at[0]).Value : Scaled(InScale(at));
    }

    /// <summary>Row of the operator: value at the point = row . y. Null where the neighbourhood cannot carry the polynomial.</summary>
    public double[]? OperatorRow(ReadOnlySpan<double> at)
    {
        CheckPoint(at);
        var row = new double[Count];
        if (_line is null)
            return Row(InScale(at), useRobust: true);
        var fit = FitLine(_line, at[0]);
        if (!fit.Exists)
            return null;
        var part = new double[fit.Last - fit.First];
        _line.Row(at[0], fit, part);
        for (int k = 0; k < part.Length; k++)
            row[_order[fit.First + k]] = part[k];
        return row;
    }

    /// <summary>Standard error of the value at a point as a multiple of the residual scale; NaN where there is no value.</summary>
    public double ErrorFactor(ReadOnlySpan<double> at)
    {
        if (OperatorRow(at) is not { } row)
            return double.NaN;
        double sum = 0;
        for (int i = 0; i < row.Length; i++)
            if (row[i] != 0)
                sum += row[i] * row[i] / (_prior?[i] ?? 1);
        return Math.Sqrt(sum);
    }

    private void CheckPoint(ReadOnlySpan<double> at)
    {
        if (at.Length != _x.Length)
            throw new ArgumentException($"a point must have {_x.Length} coordinates but has {at.Length}", nameof(at));
    }

    private double[] InScale(ReadOnlySpan<double> at)
    {
        var scaled = new double[at.Length];
        for (int j = 0; j < at.Length; j++)
            scaled[j] = at[j] / _scales[j];
        return scaled;
    }

    private double[] At(int i) => [.. _x.Select(c => c[i])];

    private double Scaled(double[] at)
    {
        var (rows, offsets, weights) = Neighbourhood(at, useRobust: true);
        if (LocalSolve.Row(offsets, weights, Options.Degree) is not { } l)
            return double.NaN;
        double sum = 0;
        for (int k = 0; k < l.Length; k++)
            sum += l[k] * _y[rows[k]];
        return sum;
    }

    private double[]? Row(double[] at, bool useRobust)
    {
        var (rows, offsets, weights) = Neighbourhood(at, useRobust);
        if (LocalSolve.Row(offsets, weights, Options.Degree) is not { } l)
            return null;
        var row = new double[Count];
        for (int k = 0; k < rows.Length; k++)
            row[rows[k]] = l[k];
        return row;
    }

    private (int[] Rows, double[][] Offsets, double[] Weights) Neighbourhood(double[] at, bool useRobust)
    {
        var distance = new double[Count];
        for (int j = 0; j < _x.Length; j++)
            for (int i = 0; i < Count; i++)
                distance[i] += (_x[j][i] - at[j]) * (_x[j][i] - at[j]);
        double h = Stretch(Math.Sqrt(Outliers.Selection.Smallest((double[])distance.Clone(), Neighbours - 1)));
        if (!(h > 0))
            return ([], [], []);
        var rows = new List<int>(Neighbours);
        var weights = new List<double>(Neighbours);
        for (int i = 0; i < Count; i++)
        {
            double d = Math.Sqrt(distance[i]) / h;
            if (d >= 1)
                continue;
            double cube = 1 - d * d * d, w = cube * cube * cube * (_prior?[i] ?? 1) * (useRobust && _robust is not null ? _robust[i] : 1);
            if (w > 0)
            {
                rows.Add(i);
                weights.Add(w);
            }
        }
        return ([.. rows], [.. _x.Select((c, j) => rows.Select(i => c[i] - at[j]).ToArray())], [.. weights]);
    }

    /// <summary>
    /// Trace of the operator, residual sum of squares, its two moments, residual scale and degrees of freedom. For a robust fit
    /// trace and moments are those of the unweighted fit, and the scale comes from pseudovalues (Cleveland and Grosse 1991).
    /// </summary>
    /// <param name="moments">Whether scale and degrees of freedom are wanted; they cost O(n^2 q) to n = 1,500 and O(n q) beyond.</param>
    public LocalStatistics Statistics(bool moments = true, ulong seed = 1, CancellationToken cancel = default) =>
        _line is null ? StatisticsOfMany(moments, seed, cancel) : StatisticsOfLine(moments, seed, cancel);

    private LocalStatistics StatisticsOfLine(bool moments, ulong seed, CancellationToken cancel)
    {
        var plain = _robust is null ? _line! : Line(_y, _prior);
        var fits = AlongLine(plain, cancel);
        double[] hat = new double[Count], own = new double[Count];
        for (int k = 0; k < Count; k++)
        {
            int i = _order[k];
            own[i] = fits[k].Value;
            hat[i] = !fits[k].Exists ? double.NaN : fits[k].Weights is { } w ? w[k - fits[k].First] : (_prior?[i] ?? 1) * fits[k].A0;
        }
        double[] fitted = _robust is null ? own : FittedValues(cancel);
        double trace = Sums.Of(hat), rss = Squares(_y, fitted);
        if (!moments || double.IsNaN(trace))
            return new LocalStatistics(fitted, hat, trace, rss, double.NaN, double.NaN, double.NaN);
        double delta1, delta2;
        if (Count <= Thinned)
        {
            var l = new LocalOperator(Count, k => (fits[k].First, fits[k].Last), (k, row) => plain.Row(plain.X[k], fits[k], row));
            delta1 = Count - 2 * trace + Sums.Of(l.Norms(null, cancel));
            delta2 = l.SecondMoment(seed, cancel);
        }
        else
        {
            // the squared norm of a row is close to its own weight here, and n is far beyond either
            delta1 = delta2 = Count - trace;
        }
        if (_robust is null)
            return new LocalStatistics(fitted, hat, trace, rss, delta1, delta2, Math.Sqrt(rss / delta1));
        double[] pseudo = Pseudovalues(fitted), again = new double[Count];
        var refit = AlongLine(Line(pseudo, _prior), cancel);
        for (int k = 0; k < Count; k++)
            again[_order[k]] = refit[k].Value;
        return new LocalStatistics(fitted, hat, trace, rss, delta1, delta2, Math.Sqrt(Squares(pseudo, again) / delta1));
    }

    private LocalStatistics StatisticsOfMany(bool moments, ulong seed, CancellationToken cancel)
    {
        var hat = new double[Count];
        var own = new double[Count];
        var rows = new double[Count][];
        bool keep = moments && Count <= 6000;
        Parallel.For(0, Count, Threads(cancel), i =>
        {
            double[]? row = Row(At(i), useRobust: false);
            hat[i] = row?[i] ?? double.NaN;
            own[i] = row is null ? double.NaN : Dot(row, _y);
            rows[i] = keep && row is not null ? row : [];
        });
        double[] fitted = _robust is null ? own : FittedValues(cancel);
        double trace = Sums.Of(hat), rss = Squares(_y, fitted);
        if (!keep || double.IsNaN(trace))
            return new LocalStatistics(fitted, hat, trace, rss, double.NaN, double.NaN, double.NaN);
        var l = new LocalOperator(Count, _ => (0, Count), (i, row) => rows[i].CopyTo(row));
        double delta1 = Count - 2 * trace + Sums.Of(l.Norms(null, cancel)), delta2 = l.SecondMoment(seed, cancel), squares = rss;
        if (_robust is not null)
        {
            double[] pseudo = Pseudovalues(fitted);
            squares = Squares(pseudo, [.. rows.Select(r => Dot(r, pseudo))]);
        }
        return new LocalStatistics(fitted, hat, trace, rss, delta1, delta2, Math.Sqrt(squares / delta1));
    }

    private double Squares(double[] y, double[] fitted)
    {
        double sum = 0;
        for (int i = 0; i < Count; i++)
            sum += (_prior?[i] ?? 1) * (y[i] - fitted[i]) * (y[i] - fitted[i]);
        return sum;
    }

    private double[] Pseudovalues(double[] fitted)
    {
        double[] size = Sizes(fitted);
        double c = Math.Pow(6 * Quantiles.Median(size), 2) / 5, sum = 0;
        for (int i = 0; i < Count; i++)
            sum += (1 - size[i] * size[i] / c) * Math.Sqrt(_robust![i]);
        double factor = Count / sum;
        return [.. fitted.Select((f, i) => f + factor * _robust![i] * (_y[i] - f))];
    }

    private static double Dot(double[] a, double[] b) => System.Numerics.Tensors.TensorPrimitives.Dot<double>(a, b);

    private static double TrimmedScale(double[] values)
    {
        double[] sorted = [.. values.Order()];
        int cut = (int)Math.Ceiling(0.1 * sorted.Length);
        return sorted.Length - 2 * cut < 2 ? Moments.Of(sorted).StandardDeviation : Moments.Of(sorted.AsSpan(cut, sorted.Length - 2 * cut)).StandardDeviation;
    }

    private static ParallelOptions Threads(CancellationToken cancel) => new() { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount };
}
