using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

/// <summary>One selection problem on fixed records, which can be repeated on parts and resamples of them.</summary>
internal sealed class Selection
{
    private readonly IReadOnlyList<TermSpec> _specs;
    private readonly StepwiseOptions _options;
    private readonly IReadOnlyList<int>[] _parents;
    private MixedFit? _mixed;

    public Selection(Sample sample, IReadOnlyList<TermSpec> specs, double[] y, StepwiseOptions options, double confidence)
    {
        (_specs, _options, Y, Confidence) = (specs, options, y, confidence);
        Data = Terms.Data(sample, specs);
        Vehicles = sample.VehicleOf ?? [.. Enumerable.Range(0, y.Length)];
        Repeats = sample.VehiclesRepeat;
        _parents = [.. specs.Select(s => (IReadOnlyList<int>)(s.Kind == TermKind.Product
            ? [.. Enumerable.Range(0, specs.Count).Where(p => specs[p].Kind != TermKind.Product && specs[p].Power == 1 && s.Factors.Any(f => f.Variable == specs[p].Variable))]
            : s.Power > 1 ? [.. Enumerable.Range(0, specs.Count).Where(p => specs[p].Kind == TermKind.Number && specs[p].Power == s.Power - 1 && specs[p].Variable == s.Variable)] : []))];
    }

    public DesignData Data { get; }

    public double[] Y { get; }

    public int[] Vehicles { get; }

    public bool Repeats { get; }

    public double Confidence { get; }

    /// <summary>Whether the Fuller-Battese transform was needed.</summary>
    public bool Transformed { get; private set; }

    public int TermCount => _specs.Count;

    public string LabelOf(int term) => _specs[term].Label;

    /// <summary>Chooses on all records.</summary>
    public SelectionPath Choose(CancellationToken cancel)
    {
        // the components are estimated once on all records and then held fixed, in resamples too
        if (Repeats)
            _mixed = MixedModel.Of([.. Design.Of(_specs, Data).Columns.Select(c => c.Values)], Y, Vehicles, cancel);
        Transformed = _mixed is { Between: > 0 };
        return Choose(Data, Y, Vehicles, cancel);
    }

    /// <summary>Chooses on other records with the same settings.</summary>
    public SelectionPath Choose(DesignData data, double[] y, int[] vehicles, CancellationToken cancel)
    {
        var design = Design.Of(_specs, data);
        var columns = design.Columns.Select(c => (c.Term, c.Values)).ToArray();
        double[]? intercept = null;
        double[] target = y;
        if (_mixed is { Between: > 0 } mixed)
        {
            double[] shares = FullerBattese.Shares(vehicles, mixed.Between, mixed.Within);
            columns = [.. columns.Select(c => (c.Term, FullerBattese.Transform(c.Values, vehicles, shares)))];
            target = FullerBattese.Transform(y, vehicles, shares);
            intercept = FullerBattese.Transform([.. Enumerable.Repeat(1.0, y.Length)], vehicles, shares);
        }
        return Stepwise.Select(columns, _specs.Count, _parents, target, _options, intercept, cancel);
    }

    /// <summary>Squared errors on rows held out of a least-squares fit of these terms; NaN where a row cannot be predicted.</summary>
    public double[] HeldOutErrors(IReadOnlyList<int> terms, int[] train, int[] test)
    {
        var specs = terms.Select(t => _specs[t]).ToList();
        var design = Design.Of(specs, Data.At(train));
        var fit = LinearFit.Of(design.Columns, [.. train.Select(i => Y[i])]);
        return [.. test.Select(i =>
        {
            if (fit.Reason is not null)
                return double.NaN;
            var (row, reason) = design.RowOf(Data, i);
            return reason is null ? Math.Pow(Y[i] - fit.Predict(row!).Value, 2) : double.NaN;
        })];
    }
}
