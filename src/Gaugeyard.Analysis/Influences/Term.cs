using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Records.Columns;
using Gaugeyard.Statistics.Regression;

namespace Gaugeyard.Analysis.Influences;

/// <summary>One term as it is asked for: a column, a power of it, its logarithm, or a product of columns.</summary>
public sealed record Term
{
    public string? Column { get; init; }

    /// <summary>Power of a number column, 1 to 10.</summary>
    public int? Power { get; init; }

    public bool? Log { get; init; }

    /// <summary>Base level of a category; the most frequent one by default.</summary>
    public string? Base { get; init; }

    /// <summary>Columns to multiply.</summary>
    public IReadOnlyList<string>? Product { get; init; }

    /// <summary>What people call it.</summary>
    public string Label() => Product is { } p ? string.Join(" × ", p) : Log == true ? $"log {Column}" : Power is > 1 ? $"{Column}^{Power}" : Column ?? "";

    /// <summary>Columns the term needs.</summary>
    public IReadOnlyList<string> Columns() => Product ?? [Column!];
}

/// <summary>Turns terms as asked for into those of a model, and columns into its data.</summary>
internal static class Terms
{
    public static List<TermSpec> Specs(Sample sample, IReadOnlyList<Term> terms, string reading)
    {
        if (terms.Count == 0)
            throw new QuestionException("Name at least one term.");
        var specs = new List<TermSpec>();
        foreach (var term in terms)
        {
            if ((term.Column is null) == (term.Product is null))
                throw new QuestionException("A term is either a column or a product of columns.");
            if (term.Product is { Count: < 2 })
                throw new QuestionException("A product needs at least two columns.");
            if (term.Power is < 1 or > 10)
                throw new QuestionException($"A power must lie between 1 and 10 but is {term.Power}.");
            foreach (string column in term.Columns())
            {
                if (column == reading)
                    throw new QuestionException($"{reading} is the reading itself and cannot be one of its own terms.");
                if (!IsNumber(sample, column) && (term.Power is > 1 || term.Log == true))
                    throw new QuestionException($"{column} is a category, so it has no power or logarithm.");
            }
            specs.Add(term.Product is { } product
                ? new TermSpec(term.Label(), TermKind.Product, null) { Factors = [.. product.Select(c => Single(sample, c, null))] }
                : Single(sample, term.Column!, term.Base) with { Label = term.Label(), Kind = term.Log == true ? TermKind.Log : Single(sample, term.Column!, null).Kind, Power = term.Power ?? 1 });
        }
        if (specs.GroupBy(s => s.Label).FirstOrDefault(g => g.Count() > 1) is { } twice)
            throw new QuestionException($"The term {twice.Key} is named twice.");
        return specs;
    }

    /// <summary>Variables of the terms for the records of a complete sample.</summary>
    public static DesignData Data(Sample sample, IEnumerable<TermSpec> specs)
    {
        var data = new DesignData(sample.Count);
        foreach (string name in specs.SelectMany(s => s.Variables).Distinct())
        {
            if (IsNumber(sample, name))
                data.Numbers[name] = sample.Number(name);
            else
                data.Categories[name] = sample.Category(name);
        }
        return data;
    }

    public static bool IsNumber(Sample sample, string column) => sample.Require(column) is NumberColumn;

    private static TermSpec Single(Sample sample, string column, string? level) =>
        new(column, IsNumber(sample, column) ? TermKind.Number : TermKind.Category, column) { Base = level };
}
