using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Regression;

/// <summary>The columns of a linear model without its intercept, and how to make the same columns for other records.</summary>
public sealed class Design
{
    private readonly Dictionary<string, string[]> _levels = new(StringComparer.Ordinal);
    private readonly Dictionary<TermSpec, string> _bases = [];

    private Design(IReadOnlyList<TermSpec> terms, IReadOnlyList<DesignColumn> columns)
    {
        Terms = terms;
        Columns = columns;
    }

    public IReadOnlyList<TermSpec> Terms { get; }

    public IReadOnlyList<DesignColumn> Columns { get; private set; }

    /// <summary>Builds the columns of every term.</summary>
    /// <exception cref="ArgumentException">A variable is missing, has another length, or a logarithm meets a value that is not positive.</exception>
    public static Design Of(IReadOnlyList<TermSpec> terms, DesignData data)
    {
        var design = new Design(terms, []);
        foreach (var (name, (codes, levels)) in data.Categories)
        {
            if (codes.Length != data.Count)
                throw new ArgumentException($"'{name}' must have {data.Count} values but has {codes.Length}", nameof(data));
            var present = new bool[levels.Length];
            foreach (int c in codes)
                present[c] = true;
            design._levels[name] = [.. levels.Where((_, k) => present[k])];
        }
        foreach (var term in terms)
            design.ChooseBases(term, data);
        var columns = new List<DesignColumn>();
        for (int t = 0; t < terms.Count; t++)
            foreach (var part in design.Expand(terms[t], data))
                columns.Add(new DesignColumn(t, part.Levels.Count == 0 ? terms[t].Label : $"{terms[t].Label} {string.Join(" × ", part.Levels)}", part.Levels, part.High, part.Low));
        design.Columns = columns;
        return design;
    }

    /// <summary>Base level of a category term.</summary>
    public string BaseOf(TermSpec term) => _bases[term];

    /// <summary>The row of column values of another record, or the reason why it cannot be made.</summary>
    public (double[]? Row, string? Reason) RowOf(DesignData data, int i)
    {
        foreach (string name in Terms.SelectMany(t => t.Variables).Distinct())
        {
            if (data.Numbers.TryGetValue(name, out double[]? values))
            {
                if (double.IsNaN(values[i]))
                    return (null, $"{name} is missing");
            }
            else
            {
                var (codes, levels) = data.Categories[name];
                if (codes[i] < 0)
                    return (null, $"{name} is missing");
                if (Array.IndexOf(_levels[name], levels[codes[i]]) < 0)
                    return (null, $"{name} '{levels[codes[i]]}' was never tested");
            }
        }
        if (Terms.SelectMany(Flatten).FirstOrDefault(t => t.Kind == TermKind.Log && !(data.Numbers[t.Variable!][i] > 0)) is { } log)
            return (null, $"{log.Variable} is not positive, so it has no logarithm");
        var one = data.At([i]);
        return ([.. Terms.SelectMany(t => Expand(t, one)).Select(p => p.High[0])], null);
    }

    private static IEnumerable<TermSpec> Flatten(TermSpec term) => term.Kind == TermKind.Product ? term.Factors.SelectMany(Flatten) : [term];

    private void ChooseBases(TermSpec term, DesignData data)
    {
        foreach (var t in Flatten(term).Where(t => t.Kind == TermKind.Category))
        {
            if (!data.Categories.TryGetValue(t.Variable!, out var category))
                throw new ArgumentException($"there is no category '{t.Variable}' in the data", nameof(data));
            var counts = new int[category.Levels.Length];
            foreach (int c in category.Codes)
                counts[c]++;
            string most = category.Levels.Length == 0 ? "" : category.Levels[Array.IndexOf(counts, counts.Max())];
            _bases[t] = t.Base is { } wanted && _levels[t.Variable!].Contains(wanted) ? wanted : most;
        }
    }

    private IEnumerable<(IReadOnlyList<string> Levels, double[] High, double[]? Low)> Expand(TermSpec term, DesignData data)
    {
        switch (term.Kind)
        {
            case TermKind.Category:
                var (codes, levels) = data.Categories[term.Variable!];
                foreach (string level in _levels[term.Variable!])
                {
                    if (level == _bases[term])
                        continue;
                    int k = Array.IndexOf(levels, level);
                    yield return ([level], [.. codes.Select(c => c == k ? 1.0 : 0.0)], null);
                }
                break;
            case TermKind.Product:
                IEnumerable<(IReadOnlyList<string> Levels, double[] High, double[]? Low)> parts = [([], [.. Enumerable.Repeat(1.0, data.Count)], null)];
                foreach (var factor in term.Factors)
                {
                    var expanded = Expand(factor, data).ToArray();
                    // the first factor varies fastest, so that columns stand in the order of its levels
                    parts = [.. expanded.SelectMany(f => parts.Select(p => ((IReadOnlyList<string>)[.. p.Levels, .. f.Levels], (double[])[.. p.High.Select((v, i) => v * f.High[i])], (double[]?)null)))];
                }
                foreach (var part in parts)
                    yield return part;
                break;
            default:
                double[] values = data.Numbers.TryGetValue(term.Variable!, out var found) ? found : throw new ArgumentException($"there is no number '{term.Variable}' in the data", nameof(data));
                if (values.Length != data.Count)
                    throw new ArgumentException($"'{term.Variable}' must have {data.Count} values but has {values.Length}", nameof(data));
                if (term.Kind == TermKind.Log)
                {
                    if (Array.Exists(values, v => !(v > 0)))
                        throw new ArgumentException($"'{term.Variable}' has values that are not positive, so it has no logarithm", nameof(data));
                    yield return ([], [.. values.Select(v => Math.Log(v))], null);
                }
                else if (term.Power == 1)
                    yield return ([], values, null);
                else
                {
                    var high = new double[values.Length];
                    var low = new double[values.Length];
                    for (int i = 0; i < values.Length; i++)
                    {
                        DoubleDouble power = values[i];
                        for (int k = 1; k < term.Power; k++)
                            power *= values[i];
                        (high[i], low[i]) = (power.High, power.Low);
                    }
                    yield return ([], high, low);
                }
                break;
        }
    }
}
