using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Statistics.Filling;

/// <summary>What was tested: no reading is filled outside it.</summary>
public sealed class TestedRange
{
    private readonly FillData _data;
    private readonly Dictionary<string, (double Low, double High)> _ranges = [];
    private readonly Dictionary<string, bool[]> _levels = [];
    private readonly Design? _design;
    private readonly LinearFit? _fit;
    private readonly double _leverage;

    private TestedRange(FillData data, int[] rows, string[] variables)
    {
        _data = data;
        foreach (string n in data.Numbers.Intersect(variables))
            _ranges[n] = (rows.Min(i => data.Predictors.Numbers[n][i]), rows.Max(i => data.Predictors.Numbers[n][i]));
        foreach (string c in data.Categories.Intersect(variables))
        {
            var (codes, levels) = data.Predictors.Categories[c];
            _levels[c] = new bool[levels.Length];
            foreach (int i in rows)
                _levels[c][codes[i]] = true;
        }
        var terms = data.Terms.Where(t => variables.Contains(t.Variable)).ToList();
        // without a number there is no combination of conditions to lie outside of
        if (!terms.Exists(t => t.Kind == TermKind.Number))
            return;
        _design = Design.Of(terms, data.Predictors.At(rows));
        _fit = LinearFit.Of(_design.Columns, [.. rows.Select(i => data.Y[i])]);
        _leverage = _fit.Reason is null ? _fit.Leverage.Max() : double.PositiveInfinity;
    }

    /// <summary>Range of the records a way learns from, in the predictors it goes by (all by default).</summary>
    public static TestedRange Of(FillData data, int[] rows, string[]? variables = null) => new(data, rows, variables ?? [.. data.Terms.Select(t => t.Variable!)]);

    /// <summary>Why a record may not be filled, as a phrase; null when it may.</summary>
    public string? Refusal(int i)
    {
        if (_data.MissingPredictor(i) is { } missing)
            return $"{missing} is missing";
        foreach (var (name, (low, high)) in _ranges)
        {
            double x = _data.Predictors.Numbers[name][i];
            if (x < low)
                return $"{name} {x:0.###} lies below every tested value ({low:0.###})";
            if (x > high)
                return $"{name} {x:0.###} lies above every tested value ({high:0.###})";
        }
        foreach (var (name, seen) in _levels)
        {
            var (codes, levels) = _data.Predictors.Categories[name];
            if (!seen[codes[i]])
                return $"{name} '{levels[codes[i]]}' was never tested";
        }
        if (_fit is { Reason: null } && _design!.RowOf(_data.Predictors, i).Row is { } row && _fit.Predict(row).Leverage > _leverage * (1 + 1e-9))
            return "this combination of conditions lies outside the tested ones";
        return null;
    }
}
