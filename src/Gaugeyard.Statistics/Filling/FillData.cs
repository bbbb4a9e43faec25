using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Statistics.Filling;

/// <summary>
/// Records with some readings missing. Predictors cover every record; a number may be NaN and a code -1 where it is missing.
/// </summary>
/// <param name="Predictors">Variables of all records.</param>
/// <param name="Terms">One main-effect term per predictor, in the user's order.</param>
/// <param name="Y">Reading per record; NaN where missing.</param>
/// <param name="Vehicles">Vehicle code per record; each record its own where vehicles are not told apart.</param>
public sealed record FillData(DesignData Predictors, IReadOnlyList<TermSpec> Terms, double[] Y, int[] Vehicles)
{
    /// <summary>Names of number predictors.</summary>
    public string[] Numbers => [.. Terms.Where(t => t.Kind == TermKind.Number).Select(t => t.Variable!)];

    /// <summary>Names of category predictors.</summary>
    public string[] Categories => [.. Terms.Where(t => t.Kind == TermKind.Category).Select(t => t.Variable!)];

    /// <summary>Whether every predictor of a record is known.</summary>
    public bool Complete(int i) => Numbers.All(n => !double.IsNaN(Predictors.Numbers[n][i])) && Categories.All(c => Predictors.Categories[c].Codes[i] >= 0);

    /// <summary>First predictor that a record misses, or null.</summary>
    public string? MissingPredictor(int i) => Terms.Select(t => t.Variable!).FirstOrDefault(v => Predictors.Numbers.TryGetValue(v, out double[]? n) ? double.IsNaN(n[i]) : Predictors.Categories[v].Codes[i] < 0);
}

/// <summary>A trained way: gives a value for any record whose predictors are known.</summary>
public interface IFillFit
{
    /// <summary>Value for a record, on the scale of Y; NaN where this way has nothing to go by.</summary>
    double At(int i);
}

/// <summary>A way to fill missing readings.</summary>
public interface IFillWay
{
    /// <summary>Name in the interface, for example "group-mean".</summary>
    string Name { get; }

    /// <summary>Predictors this way goes by: only their tested range bounds it. All by default.</summary>
    string[] Uses(FillData data, int[] rows) => [.. data.Terms.Select(t => t.Variable!)];

    /// <summary>Learns from records whose reading and predictors are known.</summary>
    IFillFit Train(FillData data, int[] rows, CancellationToken cancel);
}
