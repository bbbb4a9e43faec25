using Gaugeyard.Statistics.Outliers;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>Units (runs or vehicles) judged against the bulk of them: distances, chances and false-discovery rates, one per unit.</summary>
internal sealed class Judged
{
    private readonly double[][] _values, _centered;
    private readonly double[][]? _centers;
    private readonly int[]? _among;
    private readonly double[] _within;
    private readonly double _ordinary;

    private Judged(double[][] values, double[][] centered, int[]? among, double[][]? centers, McdResult mcd, double m, double[] p, double[] q)
    {
        (_values, _centered, _among, _centers, Mcd, P, Q) = (values, centered, among, centers, mcd, p, q);
        _within = new double[mcd.P + 1];
        _ordinary = Statistics.Outliers.DistanceCut.SquaredDistance(0.05, mcd.P, m);
        for (int k = 1; k < mcd.P; k++)
            _within[k] = Statistics.Outliers.DistanceCut.SquaredDistance(0.025, k, m);
    }

    public McdResult Mcd { get; }

    public double[] P { get; }

    public double[] Q { get; }

    public int Count => P.Length;

    public double Distance(int i) => Math.Sqrt(Mcd.RawDistances[i]);

    /// <summary>
    /// Judges complete units. With levels, each reading is first centred by the median of its level, so that a unit is judged among its like.
    /// </summary>
    /// <exception cref="CannotAnswerException">The data cannot carry it.</exception>
    public static Judged Of(double[][] values, IReadOnlyList<string> names, int[]? among, int levels, string units, ulong seed, IProgress<double>? progress, CancellationToken cancel)
    {
        int p = values.Length, n = values[0].Length;
        if (n < 2 * p + 1 || n < 5)
            throw new CannotAnswerException($"Only {n} {units} know all of these readings; at least {Math.Max(5, 2 * p + 1)} are needed to judge {p} together. Choose fewer readings, or a wider slice.");
        double[][]? centers = among is null ? null : Centers(values, among, levels);
        double[][] centered = centers is null ? values : [.. values.Select((x, j) => x.Select((v, i) => v - centers[j][among![i]]).ToArray())];
        for (int j = 0; j < p; j++)
            if (HalfEqual(centered[j]))
                throw new CannotAnswerException($"{names[j]} has the same value in at least half of the {units}, so that nothing can be said to stand off from it. Leave it out, or choose other readings.");
        var mcd = MinimumCovarianceDeterminant.Estimate(centered, new McdOptions { Seed = seed }, progress, cancel);
        if (mcd.Status == McdStatus.OnAPlane)
            throw new CannotAnswerException($"In at least half of the {units} one of these readings follows exactly from the others (the same quantity twice, or a sum). Leave one of them out.");
        if (mcd.Status != McdStatus.Found)
            throw new CannotAnswerException(mcd.Reason);
        double m = Statistics.Outliers.DistanceCut.DegreesOfFreedom(n, p);
        if (!(m > p - 1))
            throw new CannotAnswerException($"{n} {units} are too few to say how far is far for {p} readings together. Choose fewer readings, or a wider slice.");
        double[] chance = Array.ConvertAll(mcd.RawDistances, d => Statistics.Outliers.DistanceCut.UpperTail(d, p, m));
        return new Judged(values, centered, among, centers, mcd, m, chance, AdjustedP.FalseDiscovery(chance));
    }

    /// <summary>The cells that make a unit stand off.</summary>
    /// <param name="usual">What the other runs of its vehicle read, per reading, NaN where that is not known; null when slips of entry are not looked for.</param>
    public IReadOnlyList<StandoutCell> Cells(int i, IReadOnlyList<string> names, IReadOnlyList<IReadOnlyList<UnitReading>> units, IReadOnlyList<string?> unitCodes, double[]? usual)
    {
        var record = new double[names.Count];
        for (int j = 0; j < record.Length; j++)
            record[j] = _centered[j][i];
        var exchanged = usual is null ? null : Exchanged(record, i, names, unitCodes);
        return [.. CellBlame.Of(record, Mcd.Center, Mcd.Covariance, _within).Select(c =>
        {
            double shift = _centers is null ? 0 : _centers[c.Reading][_among![i]], value = _values[c.Reading][i], expected = c.Expected + shift;
            if (exchanged is { } pair && (pair.A == c.Reading || pair.B == c.Reading))
            {
                int other = pair.A == c.Reading ? pair.B : pair.A;
                return new StandoutCell(names[c.Reading], value, expected, c.Shift, $"exchanged with {names[other]}?", _values[other][i]);
            }
            var slip = usual is null ? null : EntrySuspects.Find(value, expected, c.Spread, units[c.Reading]);
            if (slip is not null && !Plausible(slip.WouldBe, value, c.Reading, shift, usual![c.Reading]))
                slip = null;
            return new StandoutCell(names[c.Reading], value, expected, c.Shift, slip is null ? null : StandoutWords.Slip(slip), slip?.WouldBe);
        })];
    }

    /// <summary>
    /// A slip is thought of only where it brings the value into the bulk of its reading, and, where the vehicle has other runs, to them: a vehicle that
    /// reads so in every run was not mistyped every time.
    /// </summary>
    private bool Plausible(double wouldBe, double value, int reading, double shift, double usual) =>
        Math.Abs(wouldBe - shift - Mcd.Center[reading]) <= 3 * Math.Sqrt(Mcd.Covariance[reading, reading])
        && !(Math.Abs(value - usual) <= Math.Abs(wouldBe - usual));

    /// <summary>Two readings of the same unit that would be ordinary in each other's place.</summary>
    private (int A, int B)? Exchanged(double[] record, int i, IReadOnlyList<string> names, IReadOnlyList<string?> unitCodes)
    {
        double best = _ordinary;
        (int, int)? found = null;
        for (int a = 0; a < names.Count; a++)
            for (int b = 0; b < a; b++)
            {
                if (unitCodes[a] is null || unitCodes[a] != unitCodes[b] || _values[a][i] == _values[b][i])
                    continue;
                var swapped = (double[])record.Clone();
                double ca = _centers is null ? 0 : _centers[a][_among![i]], cb = _centers is null ? 0 : _centers[b][_among![i]];
                (swapped[a], swapped[b]) = (_values[b][i] - ca, _values[a][i] - cb);
                double d = CellBlame.SquaredDistance(swapped, Mcd.Center, Mcd.Covariance);
                if (d < best && Mcd.RawDistances[i] > 4 * best)
                    (best, found) = (d, (a, b));
            }
        return found;
    }

    private static double[][] Centers(double[][] values, int[] among, int levels)
    {
        var centers = new double[values.Length][];
        var members = Enumerable.Range(0, among.Length).GroupBy(i => among[i]).ToDictionary(g => g.Key, g => g.ToArray());
        for (int j = 0; j < values.Length; j++)
        {
            centers[j] = new double[levels];
            foreach (var (level, rows) in members)
                centers[j][level] = RobustScale.Median([.. rows.Select(i => values[j][i])]);
        }
        return centers;
    }

    private static bool HalfEqual(double[] x)
    {
        double median = RobustScale.Median(x);
        return 2 * x.Count(v => v == median) >= x.Length + 1;
    }
}
