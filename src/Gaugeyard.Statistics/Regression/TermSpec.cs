namespace Gaugeyard.Statistics.Regression;

/// <summary>What a term makes of its variable.</summary>
public enum TermKind
{
    /// <summary>A number, or a power of it.</summary>
    Number,

    /// <summary>Natural logarithm of a positive number.</summary>
    Log,

    /// <summary>A category, one column per level but the base (treatment coding).</summary>
    Category,

    /// <summary>Product of other terms.</summary>
    Product,
}

/// <summary>One term of a linear model. It enters and leaves a model as a whole.</summary>
/// <param name="Label">What people call it; unique within a model.</param>
/// <param name="Kind">What it makes of its variable.</param>
/// <param name="Variable">Name of the variable; null for a product.</param>
public sealed record TermSpec(string Label, TermKind Kind, string? Variable)
{
    /// <summary>Power of a number, from 1.</summary>
    public int Power { get; init; } = 1;

    /// <summary>Base level of a category; null takes the most frequent one (the first of equals).</summary>
    public string? Base { get; init; }

    /// <summary>Factors of a product.</summary>
    public IReadOnlyList<TermSpec> Factors { get; init; } = [];

    /// <summary>Variables the term needs.</summary>
    public IEnumerable<string> Variables => Kind == TermKind.Product ? Factors.SelectMany(f => f.Variables) : [Variable!];
}

/// <summary>Variables of a number of records, by name. Numbers are finite; category codes are 0 .. levels - 1.</summary>
public sealed class DesignData(int count)
{
    /// <summary>Number of records.</summary>
    public int Count { get; } = count;

    public Dictionary<string, double[]> Numbers { get; } = new(StringComparer.Ordinal);

    public Dictionary<string, (int[] Codes, string[] Levels)> Categories { get; } = new(StringComparer.Ordinal);

    /// <summary>The records at these rows.</summary>
    public DesignData At(int[] rows)
    {
        var part = new DesignData(rows.Length);
        foreach (var (name, values) in Numbers)
            part.Numbers[name] = [.. rows.Select(i => values[i])];
        foreach (var (name, (codes, levels)) in Categories)
            part.Categories[name] = ([.. rows.Select(i => codes[i])], levels);
        return part;
    }
}

/// <summary>One column of a design.</summary>
/// <param name="Term">Index of its term.</param>
/// <param name="Label">Term, with its level for categories.</param>
/// <param name="Levels">Levels of the categories in it, in the order of its factors; empty for numbers.</param>
/// <param name="Values">One value per record.</param>
/// <param name="Low">What the rounding of <paramref name="Values"/> lost, where it matters (powers); else null.</param>
public sealed record DesignColumn(int Term, string Label, IReadOnlyList<string> Levels, double[] Values, double[]? Low);
