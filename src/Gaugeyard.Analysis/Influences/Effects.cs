using Gaugeyard.Analysis.Wording;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

/// <summary>
/// What each column of a model is worth: the change of the fitted reading when it goes from its lowest to its highest tested
/// value (for a category from the lowest level to the highest), everything else at its average.
/// </summary>
internal static class Effects
{
    public static List<Effect> Of(ModelFit model, double confidence)
    {
        var effects = new List<Effect>();
        var coefficients = model.Coefficients;
        foreach (string variable in model.Design.Terms.SelectMany(t => t.Variables).Distinct())
        {
            // products spread a variable over several terms; their effect depends on the other factor and is shown by coefficient instead
            var own = model.Design.Terms.Where(t => t.Variables.Contains(variable)).ToList();
            if (own.Any(t => t.Kind == TermKind.Product))
                continue;
            if (model.Data.Numbers.TryGetValue(variable, out double[]? values))
                Number(model, variable, values, own, effects, confidence);
            else
                Category(variable, coefficients.Where(c => c.Term == own[0].Label && c.Level is not null).ToList(), model.Design.BaseOf(own[0]), effects);
        }
        return effects;
    }

    private static void Number(ModelFit model, string variable, double[] values, List<TermSpec> own, List<Effect> effects, double confidence)
    {
        double low = values.Min(), high = values.Max(), change = 0;
        int decimals = Say.DecimalsFor((high - low) / 10);
        var used = own.Select(t => (Term: t, C: model.Coefficients.FirstOrDefault(c => c.Term == t.Label))).Where(x => x.C is not null).ToList();
        if (used.Count == 0)
            return;
        foreach (var (term, c) in used)
            change += c!.Estimate * (Value(term, high) - Value(term, low));
        double half = double.NaN;
        if (used.Count == 1)
            half = (used[0].C!.High - used[0].C!.Low) / 2 * Math.Abs(Value(used[0].Term, high) - Value(used[0].Term, low)) ?? double.NaN;
        else
        {
            // several terms of one variable: classical error of the whole difference from two predictions on one line
            double[] mean = [.. model.Design.Columns.Select(c => c.Values.Average())];
            double[] a = Row(low), b = Row(high);
            double[] difference = [.. a.Zip(b, (x, y) => y - x)], zero = new double[difference.Length];
            var (_, se, _) = model.Fit.Predict([.. mean.Zip(difference, (m, d) => m + d)]);
            double floor = model.Fit.S / Math.Sqrt(model.Fit.Count);
            half = Probability.StudentQuantile(0.5 + confidence / 2, model.Fit.Df) * Math.Sqrt(Math.Max(0, se * se - floor * floor));
            double[] Row(double at) => [.. model.Design.Columns.Select((c, j) => own.IndexOf(model.Design.Terms[c.Term]) >= 0 ? Value(model.Design.Terms[c.Term], at) : mean[j])];
        }
        if (double.IsFinite(half))
            effects.Add(new Effect(variable, Say.Number(low, decimals), Say.Number(high, decimals), change, change - half, change + half));
    }

    private static void Category(string variable, List<WireCoefficient> levels, string baseLevel, List<Effect> effects)
    {
        if (levels.Count == 0)
            return;
        // from the base to the level that differs most from it, whose interval is known
        var far = levels.Where(c => c.Low is not null).MaxBy(c => Math.Abs(c.Estimate));
        if (far is not null)
            effects.Add(new Effect(variable, baseLevel, far.Level!, far.Estimate, far.Low!.Value, far.High!.Value));
    }

    private static double Value(TermSpec term, double x) => term.Kind == TermKind.Log ? Math.Log(x) : Math.Pow(x, term.Power);
}
