using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Analysis.Curves;

/// <summary>The records of a curve as arrays.</summary>
internal sealed class CurveData
{
    private CurveData(Sample sample, double[][] x, double[] y)
    {
        (Sample, X, Y) = (sample, x, y);
        Units = sample.VehicleOf ?? [.. Enumerable.Range(0, y.Length)];
        UnitCount = sample.VehicleCount ?? y.Length;
        Low = [.. x.Select(c => c.Min())];
        High = [.. x.Select(c => c.Max())];
    }

    public Sample Sample { get; }

    public double[][] X { get; }

    public double[] Y { get; }

    /// <summary>Tested range of each predictor.</summary>
    public double[] Low { get; }

    public double[] High { get; }

    /// <summary>Unit of resampling and folds: the vehicle, or the record where vehicles are not told apart.</summary>
    public int[] Units { get; }

    public int UnitCount { get; }

    /// <summary>What a unit is called.</summary>
    public string UnitWord => Sample.VehicleOf is null ? "records" : "vehicles";

    public static CurveData Of(Sample complete, CurveQuestion question) => new(complete, [.. question.Against.Select(complete.Number)], complete.Number(question.Reading));

    /// <summary>These data, or whole units drawn at random that hold about so many records.</summary>
    public CurveData AtMost(int records, ulong seed)
    {
        if (Y.Length <= records)
            return this;
        int[] order = [.. Enumerable.Range(0, UnitCount)];
        new RandomStream(seed, 0x5C0E, 0).Shuffle<int>(order);
        int[] sizes = new int[UnitCount];
        foreach (int u in Units)
            sizes[u]++;
        var kept = new bool[UnitCount];
        int total = 0;
        foreach (int u in order)
        {
            if (total >= records)
                break;
            kept[u] = true;
            total += sizes[u];
        }
        int[] rows = [.. Enumerable.Range(0, Y.Length).Where(i => kept[Units[i]])];
        return new CurveData(Sample.Keep([.. Units.Select(u => kept[u])], "not drawn"), [.. X.Select(c => rows.Select(i => c[i]).ToArray())], [.. rows.Select(i => Y[i])]);
    }

    /// <summary>Whether a point lies within the tested range of every predictor.</summary>
    public bool Inside(double[] at)
    {
        for (int j = 0; j < X.Length; j++)
            if (at[j] < Low[j] || at[j] > High[j])
                return false;
        return true;
    }
}

/// <summary>What a way of fitting gives.</summary>
internal sealed record CurveResult
{
    public required IReadOnlyList<CurvePoint> Points { get; init; }

    public required SmoothingFigures Smoothing { get; init; }

    public StraightLine? StraightLine { get; init; }

    /// <summary>Value at each record.</summary>
    public required double[] Fitted { get; init; }

    /// <summary>Interval of the difference between two points (by their places in Points); null where there is none.</summary>
    public Func<int, int, (double Low, double High)?> Difference { get; init; } = (_, _) => null;

    public required IReadOnlyList<string> Notes { get; init; }

    public required IReadOnlyList<string> Method { get; init; }
}
