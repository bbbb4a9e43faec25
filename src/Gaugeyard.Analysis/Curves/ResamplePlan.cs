using Gaugeyard.Analysis.Wording;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Resampling;

namespace Gaugeyard.Analysis.Curves;

/// <summary>What is resampled, how often, and how the resampled curves become bands.</summary>
internal sealed class ResamplePlan
{
    private const uint ResidualTask = 0xB0F7;
    private readonly int[] _unitOf;
    private readonly ulong _seed;

    private ResamplePlan(ResampleBy by, int times, int[] unitOf, int units, ulong seed) => (By, Times, _unitOf, Units, _seed) = (by, times, unitOf, units, seed);

    public ResampleBy By { get; }

    public int Times { get; }

    public int Units { get; }

    public string Says => By switch
    {
        ResampleBy.Vehicle => $"drawing vehicles anew, {Times} times",
        ResampleBy.Record => $"drawing records anew, {Times} times",
        _ => $"making readings anew from the residuals, {Times} times",
    };

    /// <exception cref="QuestionException">Single runs would be resampled although vehicles repeat.</exception>
    public static ResamplePlan Of(CurveQuestion question, CurveData data)
    {
        var by = question.Band!.Resample ?? (data.Sample.VehicleOf is null ? ResampleBy.Record : data.UnitCount <= 12 ? ResampleBy.Wild : ResampleBy.Vehicle);
        if (by is ResampleBy.Record or ResampleBy.Residual && data.Sample.VehiclesRepeat)
            throw new QuestionException("Runs of one vehicle repeat here, so resampling single runs would make the band too narrow. Resample vehicles, or use the wild bootstrap.");
        if (by == ResampleBy.Vehicle && data.Sample.VehicleOf is null)
            by = ResampleBy.Record;
        return by is ResampleBy.Vehicle or ResampleBy.Wild
            ? new ResamplePlan(by, question.Band.Times, data.Units, data.UnitCount, question.Seed)
            : new ResamplePlan(by, question.Band.Times, [.. Enumerable.Range(0, data.Y.Length)], data.Y.Length, question.Seed);
    }

    /// <summary>How often each record is in resample b.</summary>
    public int[] Counts(int b) => ResampleCounts.Of(_unitOf, Units, _seed, b);

    /// <summary>Curves from readings made anew: fitted value plus a residual scaled by 1 / sqrt(1 - own weight), drawn or multiplied per unit.</summary>
    public double[][] Each(CurveData data, double[] fitted, double[] hat, Func<double[], double[]> curve, IProgress<double> progress, CancellationToken cancel)
    {
        double[] scaled = [.. data.Y.Select((y, i) => (y - fitted[i]) / Math.Sqrt(Math.Max(1e-6, 1 - hat[i])))];
        double centre = scaled.Average();
        var curves = new double[Times][];
        int done = 0;
        Parallel.For(0, Times, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount }, b =>
        {
            var y = new double[data.Y.Length];
            if (By == ResampleBy.Wild)
            {
                double[] m = ResampleCounts.Multipliers(Units, _seed, b);
                for (int i = 0; i < y.Length; i++)
                    y[i] = fitted[i] + m[_unitOf[i]] * scaled[i];
            }
            else
            {
                var random = new RandomStream(_seed, ResidualTask, (ulong)b);
                for (int i = 0; i < y.Length; i++)
                    y[i] = fitted[i] + scaled[random.NextInt(y.Length)] - centre;
            }
            curves[b] = curve(y);
            progress.Report((double)Interlocked.Increment(ref done) / Times);
        });
        return curves;
    }

    /// <summary>Puts the bands on a result.</summary>
    /// <param name="inside">Places of the points within the tested range; the curves have values for these only.</param>
    public CurveResult Banded(CurveResult result, double[][] points, double[] fitted, int[] inside, IReadOnlyList<double[]> curves, double confidence, string? note)
    {
        var notes = new List<string>(result.Notes);
        if (note is not null)
            notes.Add(note);
        if (By == ResampleBy.Vehicle && Units <= 12)
            notes.Add($"With only {Units} vehicles, drawing vehicles anew gives bands that are too narrow; the wild bootstrap is better here.");
        // with few vehicles resamples are too alike; the usual factor makes up for it
        double inflate = By is ResampleBy.Vehicle && Units is > 1 and < 30 ? Math.Sqrt(Units / (Units - 1.0)) : 1;
        if (inflate > 1)
            notes.Add($"The bands rest on {Units} vehicles, fewer than 30, and are approximate.");
        double[] centre = [.. inside.Select(g => fitted[g])];
        var band = BootstrapIntervals.Bands(centre, curves, confidence, inflate);
        if (band.Used < Times)
            notes.Add($"{Times - band.Used} of {Times} resamples could not carry the whole curve and were passed over.");
        var answer = result.Points.ToArray();
        for (int k = 0; k < inside.Length; k++)
        {
            int g = inside[k];
            answer[g] = new CurvePoint(points[g], fitted[g], UnseenParts.Finite(band.StandardError[k]), UnseenParts.Finite(band.Low[k]), UnseenParts.Finite(band.High[k]), UnseenParts.Finite(band.WholeLow[k]), UnseenParts.Finite(band.WholeHigh[k]));
        }
        var place = inside.Select((g, k) => (g, k)).ToDictionary(p => p.g, p => p.k);
        return result with
        {
            Points = answer,
            Notes = notes,
            Difference = (a, b) =>
            {
                if (!place.TryGetValue(a, out int from) || !place.TryGetValue(b, out int to))
                    return null;
                double[] changes = [.. curves.Select(c => c[to] - c[from]).Where(double.IsFinite)];
                if (changes.Length < 20)
                    return null;
                double d = centre[to] - centre[from];
                var (low, high) = BootstrapIntervals.Percentile(changes, confidence);
                return (d + inflate * (low - d), d + inflate * (high - d));
            },
            Method = [.. result.Method, $"Bands from {Say.Count(band.Used, "resample")} of {(By switch { ResampleBy.Vehicle => "vehicles", ResampleBy.Record => "records", ResampleBy.Wild => $"residuals with one random multiplier per {(Units < _unitOf.Length ? "vehicle" : "record")} (wild bootstrap, {(Units <= 12 ? "Webb 2014" : "Mammen 1993")})", _ => "residuals" })}: percentiles at one place, sup-t for the whole curve (Montiel Olea and Plagborg-Møller 2019)."],
        };
    }
}
