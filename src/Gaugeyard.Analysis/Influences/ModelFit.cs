using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

/// <summary>A linear model fitted to a complete sample, with its figures as the answer shows them.</summary>
internal sealed class ModelFit
{
    private const int MostResiduals = 5000;
    private readonly double[] _y;

    private ModelFit(Design design, DesignData data, LinearFit fit, IReadOnlyList<WireCoefficient> coefficients, double[] y)
    {
        (Design, Data, Fit, Coefficients, _y) = (design, data, fit, coefficients, y);
        Figures = new FitFigures(fit.Count, fit.Df, fit.Rss, Finite(fit.S), Finite(fit.R2), Finite(fit.AdjustedR2), Finite(fit.PressR2), Finite(fit.Aic), Finite(fit.Aicc), Finite(fit.Bic), Finite(fit.F), Finite(fit.P));
        Gvif = fit.Gvif(design.Columns).ToDictionary(g => design.Terms[g.Key].Label, g => g.Value);
        Dropped = DroppedColumns(design, fit);
    }

    public Design Design { get; }

    public DesignData Data { get; }

    public LinearFit Fit { get; }

    public IReadOnlyList<WireCoefficient> Coefficients { get; }

    public FitFigures Figures { get; }

    public IReadOnlyDictionary<string, double> Gvif { get; }

    public IReadOnlyList<DroppedTerm> Dropped { get; }

    public IReadOnlyList<string> Notes
    {
        get
        {
            var notes = new List<string>();
            if (Dropped.Count > 0)
                notes.Add($"Left out because they repeat what other terms say: {Say.List([.. Dropped.Select(d => d.Term)])}.");
            if (Fit.Df == 0)
                notes.Add("There are as many coefficients as records: the fit passes through every point and says nothing about error.");
            var weak = Coefficients.Where(c => c.Df is < 4 && c.SeVehicle is not null).Select(c => c.Term).Distinct().ToList();
            if (weak.Count > 0)
                notes.Add($"{Say.List(weak, 4)}: fewer than about 4 degrees of freedom by vehicle, so its interval says little. More vehicles would help.");
            var rests = Coefficients.Where(c => c.SeVehicle is null && Clustered).Select(c => c.Level is null ? c.Term : $"{c.Term} {c.Level}").Distinct().ToList();
            if (rests.Count > 0)
                notes.Add($"{Say.List(rests, 4)} rests on one vehicle, so it has no vehicle-aware error.");
            var entangled = Gvif.Where(g => g.Value > 10).Select(g => g.Key).ToList();
            if (entangled.Count > 0 && Design.Terms.All(t => t.Kind != TermKind.Product && t.Power == 1))
                notes.Add($"{Say.List(entangled, 4)} go together so closely in these data that their separate effects cannot be told well.");
            return notes;
        }
    }

    private bool Clustered { get; init; }

    /// <summary>Fits the model to a sample that has all its values.</summary>
    /// <exception cref="CannotAnswerException">The data cannot carry it.</exception>
    public static ModelFit Of(Sample sample, string reading, IReadOnlyList<TermSpec> specs, double confidence, WorkContext work)
    {
        double[] y = sample.Number(reading);
        if (sample.Count == 0)
            throw new CannotAnswerException($"No record has {reading} and every term. {Reasons(sample)} Leave out the term that is mostly missing.");
        if (y.All(v => v == y[0]) && y.Length > 1)
            throw new CannotAnswerException($"{reading} has the same value in all {y.Length} records, so nothing can drive it.");
        work.Say(0.1, "building the model");
        var data = Terms.Data(sample, specs);
        var design = Design.Of(specs, data);
        if (design.Columns.Count > 2000)
            throw new CannotAnswerException($"The terms need {design.Columns.Count} coefficients, more than 2000. Leave out categories with very many levels.");
        work.Say(0.3, "fitting");
        var fit = LinearFit.Of(design.Columns, y, work.Cancel);
        if (fit.Reason is { } reason)
            throw new CannotAnswerException(reason);
        work.Say(0.7, "computing errors");
        int[]? vehicles = sample.VehicleOf;
        bool clustered = sample.VehiclesRepeat && sample.VehicleCount > 1;
        var raw = fit.Coefficients(clustered ? vehicles : null);
        var wire = new List<WireCoefficient>();
        for (int c = 0; c < raw.Count; c++)
        {
            var k = raw[c];
            double se = clustered ? k.Vehicle : k.StandardError, df = clustered ? k.VehicleDf : fit.Df;
            bool known = double.IsFinite(se) && df > 0;
            double half = known ? Probability.StudentQuantile(0.5 + confidence / 2, df) * se : double.NaN, t = known && se > 0 ? k.Estimate / se : double.NaN;
            var column = c == 0 ? null : design.Columns[fit.Kept[c - 1]];
            wire.Add(new WireCoefficient(column is null ? "intercept" : design.Terms[column.Term].Label,
                column?.Levels.Count == 1 ? column.Levels[0] : null, column?.Levels.Count > 1 ? column.Levels : null,
                k.Estimate, Finite(k.StandardError), Finite(t), Finite(double.IsNaN(t) ? double.NaN : Probability.StudentTwoSided(t, df)), Finite(k.Estimate - half), Finite(k.Estimate + half), Finite(k.Hc3), Finite(k.Vehicle))
            { Df = known ? df : null });
        }
        return new ModelFit(design, data, fit, wire, y) { Clustered = clustered };
    }

    public List<RecordFit> Records(Sample sample) => [.. Enumerable.Range(0, sample.Count).Select(i => Record(sample, i))];

    /// <summary>All residuals while they are few; beyond that the largest and an even choice of the rest.</summary>
    public List<RecordFit> Residuals(Sample sample)
    {
        if (sample.Count <= MostResiduals)
            return Records(sample);
        var large = Enumerable.Range(0, sample.Count).OrderByDescending(i => Math.Abs(Fit.Residuals[i])).Take(MostResiduals / 5).ToHashSet();
        int step = sample.Count / (MostResiduals * 4 / 5) + 1;
        return [.. Enumerable.Range(0, sample.Count).Where(i => i % step == 0 || large.Contains(i)).Select(i => Record(sample, i))];
    }

    private RecordFit Record(Sample sample, int i) =>
        new(sample.RecordAt(i), _y[i] - Fit.Residuals[i], Fit.Residuals[i], Fit.Leverage[i], Finite(Fit.StudentizedResidual(i)), Finite(Fit.CookDistance(i)));

    private static List<DroppedTerm> DroppedColumns(Design design, LinearFit fit)
    {
        var dropped = new List<DroppedTerm>();
        var kept = fit.Kept.ToHashSet();
        for (int t = 0; t < design.Terms.Count; t++)
        {
            int[] own = [.. Enumerable.Range(0, design.Columns.Count).Where(j => design.Columns[j].Term == t)];
            if (own.Length == 0)
                dropped.Add(new DroppedTerm(design.Terms[t].Label, "it has only one level in these records"));
            else if (own.All(j => !kept.Contains(j)))
                dropped.Add(new DroppedTerm(design.Terms[t].Label, "it does not vary, or is a combination of the terms before it"));
            else
                dropped.AddRange(own.Where(j => !kept.Contains(j)).Select(j => new DroppedTerm(design.Columns[j].Label, "it is a combination of the columns before it")));
        }
        return dropped;
    }

    private static string Reasons(Sample sample) => sample.LeftOut.Count == 0 ? "" : $"Left out: {string.Join(", ", sample.LeftOut.Select(l => $"{l.Count} {l.Reason}"))}.";

    private static double? Finite(double value) => double.IsFinite(value) ? value : null;
}
