using System.Text.Json;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Records.Slices;

/// <summary>
/// One condition of a slice; a record must meet all conditions. Exactly one of Is, From/To or State is given.
/// </summary>
/// <param name="Column">The column's name.</param>
public sealed record SliceCondition(string Column)
{
    /// <summary>Allowed values: texts, numbers, true/false, or null for a missing value.</summary>
    public IReadOnlyList<JsonElement>? Is { get; init; }

    /// <summary>Lowest value, included: a number or an ISO date.</summary>
    public JsonElement? From { get; init; }

    /// <summary>Highest value, included: a number or an ISO date.</summary>
    public JsonElement? To { get; init; }

    /// <summary>State of the column's cell; "measured" includes corrected cells.</summary>
    public CellState? State { get; init; }
}

/// <summary>A named set of conditions kept with its run set.</summary>
public sealed record Slice(string Name, IReadOnlyList<SliceCondition> Conditions);
