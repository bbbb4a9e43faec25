using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>What is known about a column before its cells are judged.</summary>
/// <param name="Name">Its distinct name.</param>
/// <param name="UnitCell">The unit row's cell, or "".</param>
/// <param name="Choice">What the user says about it.</param>
/// <param name="File">What the user says about the file.</param>
/// <param name="UsualMark">The file's usual decimal mark.</param>
/// <param name="From1904">Whether serial days count from 1904.</param>
internal sealed record ColumnQuestion(string Name, string UnitCell, ColumnChoice? Choice, ReadChoices File, char UsualMark, bool From1904)
{
    /// <summary>Texts that mean missing because a user said so; null when the usual ones hold.</summary>
    public IReadOnlyList<string>? SaidMissing => Choice?.MissingCodes ?? File.MissingCodes;

    /// <summary>Whether texts are taken with every blank and no spelling joined, as in a hand-over read back.</summary>
    public bool Exact { get; init; }

    /// <summary>Whether the file may guard texts with an apostrophe, as delimited files do.</summary>
    public bool Guarded { get; init; }

    public IReadOnlyList<string> Words { get; } = NameWords.Split(Name);
}

/// <summary>A column as it was made out, with everything that is to be said about it.</summary>
internal sealed record ColumnReading
{
    public required Column Column { get; init; }

    public Dictionary<int, CellMark> Marks { get; init; } = [];

    public List<Finding> Findings { get; init; } = [];

    public List<Doubt> Doubts { get; init; } = [];

    public required string Evidence { get; init; }

    /// <summary>The first values as the file wrote them.</summary>
    public IReadOnlyList<string> FirstValues { get; init; } = [];

    /// <summary>Whether no two records share a value; null when it was not looked at.</summary>
    public bool? Unique { get; init; }

    public int Known { get; init; }

    /// <summary>Numbers read as missing because they lie far outside the others.</summary>
    public IReadOnlySet<double> FarCodes { get; init; } = new HashSet<double>();

    public ColumnReading With(ColumnDefinition definition) => this with { Column = Column.With(definition) };
}

/// <summary>The column must be read again with other settings before it can be judged.</summary>
internal sealed record ReadAgain(bool AsText, char DecimalMark);
