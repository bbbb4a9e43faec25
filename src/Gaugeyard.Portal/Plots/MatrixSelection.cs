namespace Gaugeyard.Portal.Plots;

/// <summary>What was selected in the matrix: how many, the first record numbers, and, where the gesture can be said so, the ranges it stands for.</summary>
/// <param name="Records">At most the first 500 record numbers.</param>
/// <param name="Conditions">Ranges that pick exactly these records; null when the selection is not of ranges.</param>
public sealed record MatrixSelection(int Count, int Total, IReadOnlyList<int> Records, IReadOnlyList<MatrixRange>? Conditions, IReadOnlyList<MatrixGroup> Groups)
{
    /// <summary>Whether all of its records are named.</summary>
    public bool Complete => Records.Count == Count;
}

/// <summary>A range of one reading; null ends are open.</summary>
public sealed record MatrixRange(string Column, double? From, double? To);

/// <summary>How many of a level are selected.</summary>
public sealed record MatrixGroup(string Level, int Count);
