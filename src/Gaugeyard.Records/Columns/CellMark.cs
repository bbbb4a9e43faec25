namespace Gaugeyard.Records.Columns;

/// <summary>
/// What is to be said about one cell beyond its value. A cell without a mark is measured, or missing when it has no value.
/// </summary>
public sealed record CellMark(CellState State)
{
    /// <summary>Why it was corrected or set aside, or why its text could not be read.</summary>
    public string? Reason { get; init; }

    /// <summary>What the file or the earlier revision said, where the value differs from it.</summary>
    public string? Original { get; init; }

    /// <summary>Lower end of a filled cell's interval, in the column's unit.</summary>
    public double? Low { get; init; }

    /// <summary>Upper end of a filled cell's interval, in the column's unit.</summary>
    public double? High { get; init; }

    /// <summary>The way that filled the cell.</summary>
    public string? Way { get; init; }

    /// <summary>Confidence of the interval, for example 0.95.</summary>
    public double? Confidence { get; init; }

    /// <summary>Whether someone filled the cell although the portal had refused it.</summary>
    public bool Overridden { get; init; }
}
