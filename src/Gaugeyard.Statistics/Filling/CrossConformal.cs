using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Filling;

/// <summary>What an interval's level rests on.</summary>
public enum IntervalClaim
{
    /// <summary>Distribution-free: enough vehicles.</summary>
    Proved,

    /// <summary>Too few vehicles for that: assumes normal errors.</summary>
    AssumesNormal,

    /// <summary>Calibrated on the same task within vehicles: measured, not proved.</summary>
    MeasuredOnly,
}

/// <summary>A filled value with its interval.</summary>
public readonly record struct FillInterval(double Value, double Low, double High, IntervalClaim Claim);

/// <summary>
/// CV+ intervals with the vehicle as unit, each vehicle with equal weight, scaled by local spread (Barber, Candes, Ramdas and
/// Tibshirani 2021, Annals of Statistics 49:486-507; repeated runs as in Lee, Barber and Willett 2023).
/// </summary>
public sealed class CrossConformal
{
    /// <summary>Known vehicles below which no distribution-free 95 % interval exists.</summary>
    public const int FewestVehicles = 19;

    private readonly IFillFit _whole;
    private readonly IFillFit[] _folds;
    private readonly LocalScale[] _scales;
    private readonly (int Fold, double Residual, double Weight)[] _residuals;
    private readonly double _alpha, _normal;

    private CrossConformal(IFillFit whole, IFillFit[] folds, LocalScale[] scales, (int, double, double)[] residuals, double alpha, double normal, int vehicles) =>
        (_whole, _folds, _scales, _residuals, _alpha, _normal, Vehicles) = (whole, folds, scales, residuals, alpha, normal, vehicles);

    /// <summary>Vehicles with known readings.</summary>
    public int Vehicles { get; }

    /// <summary>Trains a way on everything known and on everything but each fold.</summary>
    /// <param name="rows">Records whose reading and predictors are known.</param>
    /// <param name="folds">Number of folds of whole vehicles; 0 leaves out one vehicle at a time up to 200 vehicles and takes 20 folds beyond.</param>
    public static CrossConformal Of(IFillWay way, FillData data, int[] rows, int folds, double confidence, ulong seed, IProgress<double>? progress = null, CancellationToken cancel = default)
    {
        int[] vehicles = [.. rows.Select(i => data.Vehicles[i]).Distinct().Order()];
        int k = folds > 0 ? Math.Min(folds, vehicles.Length) : vehicles.Length <= 200 ? vehicles.Length : 20;
        var part = Parts(vehicles, k, seed);
        var fits = new IFillFit[k];
        var scales = new LocalScale[k];
        int done = 0;
        Parallel.For(0, k, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, f =>
        {
            int[] train = [.. rows.Where(i => part[data.Vehicles[i]] != f)];
            fits[f] = way.Train(data, train.Length == 0 ? rows : train, cancel);
            scales[f] = LocalScale.Of(train, fits[f], data.Y);
            progress?.Report((double)Interlocked.Increment(ref done) / (k + 1));
        });
        var counts = rows.GroupBy(i => data.Vehicles[i]).ToDictionary(g => g.Key, g => g.Count());
        var residuals = rows.Select(i =>
        {
            int f = part[data.Vehicles[i]];
            double at = fits[f].At(i);
            return (f, Math.Abs(data.Y[i] - at) / scales[f].At(at), 1.0 / ((vehicles.Length + 1) * counts[data.Vehicles[i]]));
        }).Where(r => double.IsFinite(r.Item2)).ToArray();
        // typical scaled error with every vehicle counting once
        double square = rows.GroupBy(i => data.Vehicles[i]).Select(g => g.Average(i =>
        {
            int f = part[data.Vehicles[i]];
            double at = fits[f].At(i), r = (data.Y[i] - at) / scales[f].At(at);
            return double.IsFinite(r) ? r * r : 0;
        })).DefaultIfEmpty(0).Average();
        double t = vehicles.Length > 2 ? Probability.StudentQuantile(0.5 + confidence / 2, vehicles.Length - 1) : double.NaN;
        return new CrossConformal(way.Train(data, rows, cancel), fits, scales, residuals, 1 - confidence, t * Math.Sqrt(square * (1 + 1.0 / Math.Max(1, vehicles.Length))), vehicles.Length);
    }

    /// <summary>Estimate and interval of a record; NaN where the way has nothing to go by.</summary>
    public FillInterval At(int i)
    {
        double value = _whole.At(i);
        var mu = new double[_folds.Length];
        var spread = new double[_folds.Length];
        for (int f = 0; f < _folds.Length; f++)
        {
            mu[f] = _folds[f].At(i);
            // a fold that never saw the record's category has no say; the whole fit stands in
            if (double.IsNaN(mu[f]))
                mu[f] = value;
            spread[f] = _scales[f].At(mu[f]);
        }
        if (Vehicles < FewestVehicles || double.IsNaN(value))
        {
            double s = spread.Length == 0 ? double.NaN : spread.Average();
            return Widen(new FillInterval(value, value - _normal * s, value + _normal * s, IntervalClaim.AssumesNormal));
        }
        double high = Weighted([.. _residuals.Select(r => mu[r.Fold] + r.Residual * spread[r.Fold])], [.. _residuals.Select(r => r.Weight)], _alpha);
        double low = -Weighted([.. _residuals.Select(r => -(mu[r.Fold] - r.Residual * spread[r.Fold]))], [.. _residuals.Select(r => r.Weight)], _alpha);
        if (double.IsInfinity(high) || double.IsInfinity(low))
        {
            double s = spread.Average();
            return Widen(new FillInterval(value, value - _normal * s, value + _normal * s, IntervalClaim.AssumesNormal));
        }
        return Widen(new FillInterval(value, low, high, IntervalClaim.Proved));
    }

    // the estimate of the whole fit belongs to its interval
    private static FillInterval Widen(FillInterval x)
    {
        double slack = 1e-9 * Math.Max(Math.Abs(x.Value), x.High - x.Low);
        return x with { Low = Math.Min(x.Low, x.Value - slack), High = Math.Max(x.High, x.Value + slack) };
    }

    /// <summary>Smallest value whose weight from below reaches 1 - alpha; infinite when it never does. Equal values enter together.</summary>
    internal static double Weighted(double[] values, double[] weights, double alpha)
    {
        Array.Sort(values, weights);
        double sum = 0;
        for (int i = 0; i < values.Length; i++)
        {
            sum += weights[i];
            if (i + 1 < values.Length && values[i + 1] == values[i])
                continue;
            if (sum >= 1 - alpha - 1e-12)
                return values[i];
        }
        return double.PositiveInfinity;
    }

    /// <summary>Fold of each vehicle.</summary>
    public static Dictionary<int, int> Parts(int[] vehicles, int folds, ulong seed)
    {
        int[] shuffled = (int[])vehicles.Clone();
        if (folds < vehicles.Length)
            new RandomStream(seed, 0xF177, 0).Shuffle<int>(shuffled);
        return shuffled.Select((v, k) => (v, k)).ToDictionary(x => x.v, x => x.k % Math.Max(1, folds));
    }
}

/// <summary>How the size of errors goes with the estimate: a line through absolute residuals, floored at a quarter of their median.</summary>
internal sealed class LocalScale
{
    private readonly double _intercept, _slope, _floor;

    private LocalScale(double intercept, double slope, double floor) => (_intercept, _slope, _floor) = (intercept, slope, floor);

    public static LocalScale Of(int[] rows, IFillFit fit, double[] y)
    {
        var points = rows.Select(i => (X: fit.At(i), Y: 0.0, I: i)).Where(p => double.IsFinite(p.X)).Select(p => (p.X, Y: Math.Abs(y[p.I] - p.X))).ToArray();
        if (points.Length < 10)
            return new LocalScale(1, 0, 1);
        double mx = points.Average(p => p.X), my = points.Average(p => p.Y), sxx = points.Sum(p => (p.X - mx) * (p.X - mx));
        double slope = sxx > 0 ? points.Sum(p => (p.X - mx) * (p.Y - my)) / sxx : 0, median = Quantiles.Median([.. points.Select(p => p.Y)]);
        double floor = Math.Max(median, 1e-12 * Math.Abs(mx)) / 4;
        return floor > 0 ? new LocalScale(my - slope * mx, slope, floor) : new LocalScale(1, 0, 1);
    }

    public double At(double estimate) => Math.Max(_floor, _intercept + _slope * estimate);
}
