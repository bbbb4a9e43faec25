using Gaugeyard.Statistics.Regression;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Statistics.Filling;

/// <summary>The mean of the record's group (first category predictor), or of all: the floor every other way must beat.</summary>
public sealed class GroupMeanWay : IFillWay
{
    public string Name => "group-mean";

    public string[] Uses(FillData data, int[] rows) => [.. data.Categories.Take(1)];

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        double all = rows.Average(i => data.Y[i]);
        if (data.Categories.Length == 0)
            return new Fit(_ => all);
        var (codes, levels) = data.Predictors.Categories[data.Categories[0]];
        var sums = new double[levels.Length];
        var counts = new int[levels.Length];
        foreach (int i in rows)
        {
            sums[codes[i]] += data.Y[i];
            counts[codes[i]]++;
        }
        return new Fit(i => codes[i] >= 0 && counts[codes[i]] > 0 ? sums[codes[i]] / counts[codes[i]] : double.NaN);
    }

    internal sealed class Fit(Func<int, double> at) : IFillFit
    {
        public double At(int i) => at(i);
    }
}

/// <summary>Least squares on every predictor.</summary>
public sealed class RegressionWay : IFillWay
{
    public string Name => "regression";

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel) => Linear(data, data.Terms, rows, cancel);

    internal static IFillFit Linear(FillData data, IReadOnlyList<TermSpec> terms, int[] rows, CancellationToken cancel)
    {
        if (terms.Count == 0)
        {
            double mean = rows.Average(i => data.Y[i]);
            return new GroupMeanWay.Fit(_ => mean);
        }
        var design = Design.Of(terms, data.Predictors.At(rows));
        var fit = LinearFit.Of(design.Columns, [.. rows.Select(i => data.Y[i])], cancel);
        return new GroupMeanWay.Fit(i => fit.Reason is null && design.RowOf(data.Predictors, i).Row is { } row ? fit.Predict(row).Value : double.NaN);
    }
}

/// <summary>Stepwise regression among the predictors and the squares of number predictors, by AICc, chosen anew in every training.</summary>
public sealed class StepwiseWay : IFillWay
{
    public string Name => "stepwise-regression";

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        var terms = data.Terms.ToList();
        var parents = terms.Select(_ => (IReadOnlyList<int>)[]).ToList();
        for (int t = 0; t < data.Terms.Count; t++)
            if (data.Terms[t].Kind == TermKind.Number)
            {
                terms.Add(data.Terms[t] with { Label = data.Terms[t].Label + "^2", Power = 2 });
                parents.Add([t]);
            }
        var part = data.Predictors.At(rows);
        double[] y = [.. rows.Select(i => data.Y[i])];
        var design = Design.Of(terms, part);
        if (design.Columns.Count == 0 || rows.Length < 8)
            return RegressionWay.Linear(data, [], rows, cancel);
        var path = Stepwise.Select([.. design.Columns.Select(c => (c.Term, c.Values))], terms.Count, parents, y, new StepwiseOptions(), cancel: cancel);
        return RegressionWay.Linear(data, [.. path.Chosen.Select(t => terms[t])], rows, cancel);
    }
}

/// <summary>
/// Local regression on up to three number predictors that predict best; the effects of category predictors are taken out first.
/// </summary>
public sealed class LocalRegressionWay : IFillWay
{
    private const int Most = 3;

    public string Name => "local-regression";

    public string[] Uses(FillData data, int[] rows) => Carried(data, rows) is { Length: > 0 } numbers ? [.. numbers, .. data.Categories] : [.. data.Terms.Select(t => t.Variable!)];

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        string[] numbers = Carried(data, rows);
        if (numbers.Length == 0)
            return RegressionWay.Linear(data, data.Terms, rows, cancel);
        double[][] x = [.. numbers.Select(n => rows.Select(i => data.Predictors.Numbers[n][i]).ToArray())];
        return PartialResiduals.Train(data, rows, y =>
        {
            var fit = LocalRegression.Of(x, y, new LocalRegressionOptions { Degree = 1, Span = 0.6 }, cancel: cancel).Fit;
            return fit is null ? null : i => fit.Evaluate((ReadOnlySpan<double>)(double[])[.. numbers.Select(n => data.Predictors.Numbers[n][i])]);
        }, cancel);
    }

    /// <summary>Number predictors this way takes: those that lower the residual most, one after the other.</summary>
    public static string[] Carried(FillData data, int[] rows, int most = Most)
    {
        string[] numbers = [.. data.Numbers.Where(n => rows.Select(i => data.Predictors.Numbers[n][i]).Distinct().Take(4).Count() >= 4)];
        if (numbers.Length <= most)
            return numbers;
        var terms = data.Terms.Where(t => numbers.Contains(t.Variable) || t.Kind == TermKind.Category).ToList();
        var design = Design.Of(terms, data.Predictors.At(rows));
        var keep = Enumerable.Range(0, terms.Count).Where(t => terms[t].Kind == TermKind.Category).ToHashSet();
        var path = Stepwise.Select([.. design.Columns.Select(c => (c.Term, c.Values))], terms.Count, [.. terms.Select(_ => (IReadOnlyList<int>)[])], [.. rows.Select(i => data.Y[i])],
            new StepwiseOptions { Direction = SelectionDirection.Forward, Keep = keep, Criterion = SelectionCriterion.Aic });
        string[] order = [.. path.Steps.Where(s => s.Term is not null).Select(s => terms[s.Term!.Value].Variable!)];
        return [.. order.Concat(numbers.Except(order)).Take(most)];
    }
}

/// <summary>Smoothing spline on the number predictor that predicts best, with additive category effects.</summary>
public sealed class SmoothingSplineWay : IFillWay
{
    public string Name => "smoothing-spline";

    public string[] Uses(FillData data, int[] rows) => LocalRegressionWay.Carried(data, rows, 1) is { Length: > 0 } numbers ? [.. numbers, .. data.Categories] : [.. data.Terms.Select(t => t.Variable!)];

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        string[] numbers = LocalRegressionWay.Carried(data, rows, 1);
        if (numbers.Length == 0)
            return RegressionWay.Linear(data, data.Terms, rows, cancel);
        double[] values = data.Predictors.Numbers[numbers[0]], x = [.. rows.Select(i => values[i])];
        return PartialResiduals.Train(data, rows, y =>
        {
            if (SmoothingSpline.Of(x, y).Problem is not { } problem)
                return null;
            var fit = problem.FitDf(Math.Min(5, (2 + problem.Distinct) / 2.0));
            return i => fit.Evaluate(values[i]);
        }, cancel);
    }
}

/// <summary>
/// Near donors (predictive mean matching; Little 1988, J. Business and Economic Statistics 6:287-296): the mean reading of the five
/// records whose regression estimate is nearest.
/// </summary>
public sealed class NearDonorsWay : IFillWay
{
    private const int Donors = 5;

    public string Name => "near-donors";

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        var fit = RegressionWay.Linear(data, data.Terms, rows, cancel);
        double[] estimates = [.. rows.Select(fit.At)], readings = [.. rows.Select(i => data.Y[i])];
        Array.Sort(estimates, readings);
        return new GroupMeanWay.Fit(i =>
        {
            double at = fit.At(i);
            if (double.IsNaN(at))
                return double.NaN;
            int right = Array.BinarySearch(estimates, at);
            right = right < 0 ? ~right : right;
            int left = right - 1, taken = 0;
            double sum = 0;
            while (taken < Donors && (left >= 0 || right < estimates.Length))
            {
                bool goRight = left < 0 || (right < estimates.Length && estimates[right] - at <= at - estimates[left]);
                sum += readings[goRight ? right++ : left--];
                taken++;
            }
            return sum / taken;
        });
    }
}

/// <summary>Vehicle effect and covariates (mixed model): a run of a vehicle with other known runs carries that vehicle's own level.</summary>
public sealed class VehicleCarryWay : IFillWay
{
    public string Name => "vehicle-carry";

    public IFillFit Train(FillData data, int[] rows, CancellationToken cancel)
    {
        var design = Design.Of(data.Terms, data.Predictors.At(rows));
        int[] vehicles = [.. rows.Select(i => data.Vehicles[i])];
        var mixed = MixedModel.Of([.. design.Columns.Select(c => c.Values)], [.. rows.Select(i => data.Y[i])], vehicles, cancel);
        return mixed is null ? RegressionWay.Linear(data, data.Terms, rows, cancel)
            : new GroupMeanWay.Fit(i => design.RowOf(data.Predictors, i).Row is { } row ? mixed.Predict(row, data.Vehicles[i]) : double.NaN);
    }
}

/// <summary>
/// A smooth part for what category effects leave over. The effects are those of a regression on the categories and on the
/// numbers with their squares (partial residuals; Speckman 1988, JRSS B 50:413-436, in its simplest form).
/// </summary>
internal static class PartialResiduals
{
    public static IFillFit Train(FillData data, int[] rows, Func<double[], Func<int, double>?> smooth, CancellationToken cancel)
    {
        if (data.Categories.Length == 0)
            return smooth([.. rows.Select(i => data.Y[i])]) is { } plain ? new GroupMeanWay.Fit(plain) : RegressionWay.Linear(data, data.Terms, rows, cancel);
        List<TermSpec> categories = [.. data.Terms.Where(t => t.Kind == TermKind.Category)], numbers = [.. data.Terms.Where(t => t.Kind == TermKind.Number)];
        List<TermSpec> terms = [.. categories, .. numbers, .. numbers.Select(t => t with { Label = t.Label + "^2", Power = 2 })];
        var design = Design.Of(terms, data.Predictors.At(rows));
        var fit = LinearFit.Of(design.Columns, [.. rows.Select(i => data.Y[i])], cancel);
        if (fit.Reason is not null)
            return RegressionWay.Linear(data, data.Terms, rows, cancel);
        int[] own = [.. Enumerable.Range(0, fit.Kept.Length).Where(k => design.Columns[fit.Kept[k]].Term < categories.Count)];
        double Effect(double[] row) => own.Sum(k => fit.Beta[k] * row[fit.Kept[k]]);
        double[] Row(int i) => design.RowOf(data.Predictors, i).Row ?? [];
        if (smooth([.. rows.Select((i, r) => data.Y[i] - own.Sum(k => fit.Beta[k] * design.Columns[fit.Kept[k]].Values[r]))]) is not { } part)
            return RegressionWay.Linear(data, data.Terms, rows, cancel);
        return new GroupMeanWay.Fit(i => Row(i) is { Length: > 0 } row ? part(i) + Effect(row) : double.NaN);
    }
}
