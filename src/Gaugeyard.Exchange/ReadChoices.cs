using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange;

/// <summary>What a user may overrule about one column, by its name in the file.</summary>
public sealed record ColumnChoice(string Name)
{
    public ColumnKind? Kind { get; init; }

    public string? Unit { get; init; }

    public ColumnRole? Role { get; init; }

    public IReadOnlyList<string>? Levels { get; init; }

    public IReadOnlyList<string>? MissingCodes { get; init; }
}

/// <summary>Everything a user may overrule about the reading of a file; null leaves it to detection.</summary>
public sealed record ReadChoices
{
    /// <summary>Sheet of a workbook, by name.</summary>
    public string? Sheet { get; init; }

    /// <summary>Rows that hold the names, counted from 1 in the file; an empty list means there are none.</summary>
    public IReadOnlyList<int>? HeaderRows { get; init; }

    /// <summary>Row that holds the units, counted from 1; 0 means there is none.</summary>
    public int? UnitRow { get; init; }

    /// <summary>Field separator of a text file.</summary>
    public char? Delimiter { get; init; }

    /// <summary>Encoding of a text file, by its usual name.</summary>
    public string? Encoding { get; init; }

    /// <summary>'.' or ','.</summary>
    public char? DecimalMark { get; init; }

    /// <summary>True: 3/4 is 3 April. False: March 4.</summary>
    public bool? DayFirst { get; init; }

    /// <summary>Texts that stand for missing anywhere in the file.</summary>
    public IReadOnlyList<string>? MissingCodes { get; init; }

    public IReadOnlyList<ColumnChoice> Columns { get; init; } = [];
}

/// <summary>Bounds on what may be read.</summary>
public sealed record ReadLimits
{
    public int Columns { get; init; } = 2000;

    public long Cells { get; init; } = 400_000_000;

    public int CellCharacters { get; init; } = 1_000_000;

    /// <summary>Most bytes a compressed file may unpack to, counted while unpacking.</summary>
    public long UnpackedBytes { get; init; } = 4L * 1024 * 1024 * 1024;
}
