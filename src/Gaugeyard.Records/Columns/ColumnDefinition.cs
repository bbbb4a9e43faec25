namespace Gaugeyard.Records.Columns;

/// <summary>What a column is: its name, kind, role, unit and, for categories, its levels in order.</summary>
/// <param name="Name">Unique within the run set, ordinal comparison, as the file wrote it.</param>
/// <param name="Kind">What the values are.</param>
public sealed record ColumnDefinition(string Name, ColumnKind Kind)
{
    /// <summary>What the column is for.</summary>
    public ColumnRole Role { get; init; } = ColumnRole.Attribute;

    /// <summary>Unit code of a number column as <see cref="Units.Unit"/> knows it, or the file's own text; null when unknown.</summary>
    public string? Unit { get; init; }

    /// <summary>Levels of an ordered category from lowest to highest; null for other kinds.</summary>
    public IReadOnlyList<string>? Levels { get; init; }

    /// <summary>Texts that the file uses for a missing value in this column, besides an empty cell.</summary>
    public IReadOnlyList<string> MissingCodes { get; init; } = [];
}
