using Gaugeyard.Analysis.Influences;
using Gaugeyard.Statistics.Describing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>
/// Error on unseen vehicles: whole vehicles are dealt into parts, each part is predicted from a fit to the others. The score is
/// the mean over vehicles of a vehicle's mean squared error, its standard error sd / sqrt(V).
/// </summary>
internal static class UnseenParts
{
    public const int Parts = 10;

    /// <summary>Prediction of each record from a fit without its part.</summary>
    /// <param name="train">From the rows of the other parts a predictor of a record; NaN where it cannot.</param>
    public static double[] Predict(CurveData data, ulong seed, Func<int[], Func<int, double>> train, CancellationToken cancel)
    {
        int parts = Math.Min(Parts, data.UnitCount);
        var part = Honesty.Folds([.. Enumerable.Range(0, data.UnitCount)], parts, seed, 0);
        var predicted = new double[data.Y.Length];
        for (int f = 0; f < parts; f++)
        {
            cancel.ThrowIfCancellationRequested();
            var inside = new List<int>();
            var outside = new List<int>();
            for (int i = 0; i < predicted.Length; i++)
                (part[data.Units[i]] == f ? outside : inside).Add(i);
            var predict = train([.. inside]);
            Parallel.ForEach(outside, i => predicted[i] = predict(i));
        }
        return predicted;
    }

    /// <summary>Mean squared error of each unit; null where a record could not be predicted, so that nothing is judged on fewer records than its rivals.</summary>
    public static double[]? ByUnit(CurveData data, double[] predicted)
    {
        var sums = new double[data.UnitCount];
        var counts = new int[data.UnitCount];
        for (int i = 0; i < predicted.Length; i++)
        {
            if (double.IsNaN(predicted[i]))
                return null;
            sums[data.Units[i]] += (data.Y[i] - predicted[i]) * (data.Y[i] - predicted[i]);
            counts[data.Units[i]]++;
        }
        return [.. sums.Select((s, u) => s / counts[u])];
    }

    /// <summary>Mean over units and its standard error.</summary>
    public static (double? Mean, double? Se) Summary(double[]? byUnit)
    {
        if (byUnit is null || byUnit.Length == 0)
            return (null, null);
        var m = Moments.Of(byUnit);
        double se = m.StandardDeviation / Math.Sqrt(byUnit.Length);
        return (Finite(m.Mean), Finite(se));
    }

    /// <summary>A straight line on the same parts: is the curve needed at all?</summary>
    public static StraightLine? AgainstLine(CurveData data, ulong seed, Func<int[], Func<int, double>>? curve, CancellationToken cancel)
    {
        if (data.X.Length != 1 || Line(data, [.. Enumerable.Range(0, data.Y.Length)]) is not { } whole)
            return null;
        if (curve is null || data.UnitCount < 5)
            return new StraightLine(whole.Intercept, whole.Slope, null, null, null, null);
        double[]? line = ByUnit(data, Predict(data, seed, rows => Line(data, rows) is { } l ? i => l.Intercept + l.Slope * data.X[0][i] : _ => double.NaN, cancel));
        double[]? bent = ByUnit(data, Predict(data, seed, curve, cancel));
        if (line is null || bent is null)
            return new StraightLine(whole.Intercept, whole.Slope, Summary(line).Mean, Summary(bent).Mean, null, null);
        var (excess, se) = Summary([.. line.Zip(bent, (a, b) => a - b)]);
        return new StraightLine(whole.Intercept, whole.Slope, Summary(line).Mean, Summary(bent).Mean, excess, se);
    }

    private static (double Intercept, double Slope)? Line(CurveData data, int[] rows)
    {
        double mx = 0, my = 0, sxx = 0, sxy = 0;
        foreach (int i in rows)
        {
            mx += data.X[0][i];
            my += data.Y[i];
        }
        mx /= rows.Length;
        my /= rows.Length;
        foreach (int i in rows)
        {
            sxx += (data.X[0][i] - mx) * (data.X[0][i] - mx);
            sxy += (data.X[0][i] - mx) * (data.Y[i] - my);
        }
        return sxx > 0 ? (my - sxy / sxx * mx, sxy / sxx) : null;
    }

    public static double? Finite(double? value) => value is { } v && double.IsFinite(v) ? v : null;
}
