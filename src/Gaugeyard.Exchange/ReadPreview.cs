using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange;

/// <summary>What a doubt is about.</summary>
public enum DoubtAbout
{
    /// <summary>Day or month first.</summary>
    DateOrder,

    /// <summary>US or imperial gallon.</summary>
    Gallon,

    /// <summary>Whether a point or comma before three digits is a decimal mark or separates thousands.</summary>
    DecimalMark,
}

/// <summary>Something the file alone does not settle.</summary>
/// <param name="About">What it is about.</param>
/// <param name="Column">The column's name.</param>
/// <param name="Question">A sentence with the counts it rests on.</param>
/// <param name="Choices">The answers, for <see cref="ReadChoices.Settle"/>.</param>
/// <param name="Taken">The value that is taken until someone chooses; null where none is.</param>
public sealed record Doubt(DoubtAbout About, string Column, string Question, IReadOnlyList<DoubtChoice> Choices, string? Taken);

/// <summary>One answer to a doubt.</summary>
public sealed record DoubtChoice(string Value, string Label);

/// <summary>A row that is neither name, unit nor record.</summary>
/// <param name="Row">Its number in the file or sheet, from 1.</param>
/// <param name="Text">Its beginning.</param>
/// <param name="Why">Why it was left out.</param>
public sealed record LeftOutRow(int Row, string Text, string Why);

/// <summary>What was made of one column.</summary>
/// <param name="Definition">Name, kind, role, unit, levels of an ordered category, missing codes.</param>
/// <param name="Known">Records looked at that have a value.</param>
/// <param name="Missing">Records looked at that have none.</param>
/// <param name="Levels">Levels of a category in order, at most 200; null for other kinds.</param>
/// <param name="LevelCount">How many distinct levels or texts there are; 0 for numbers and dates.</param>
/// <param name="FirstValues">The first values as the file wrote them, at most five.</param>
/// <param name="Evidence">A sentence: why it was read so.</param>
public sealed record ColumnPreview(
    ColumnDefinition Definition,
    int Known,
    int Missing,
    IReadOnlyList<string>? Levels,
    int LevelCount,
    IReadOnlyList<string> FirstValues,
    string Evidence);

/// <summary>How a file will be read, with evidence, before anything is stored.</summary>
public sealed record ReadPreview
{
    /// <summary>What the file is, as a phrase: "text separated by semicolons, Windows-1252".</summary>
    public required string What { get; init; }

    /// <summary>Whether it is a workbook.</summary>
    public bool IsWorkbook { get; init; }

    /// <summary>Encoding of a text file, as <see cref="ReadChoices.Encoding"/> names it; null for a workbook.</summary>
    public string? Encoding { get; init; }

    /// <summary>What separates the fields; null for a workbook.</summary>
    public char? Delimiter { get; init; }

    /// <summary>Sheets of a workbook in order.</summary>
    public IReadOnlyList<string> Sheets { get; init; } = [];

    /// <summary>The sheet that was read.</summary>
    public string? Sheet { get; init; }

    /// <summary>The range that was read, where the sheet is bigger or was narrowed down.</summary>
    public string? Range { get; init; }

    /// <summary>Decimal mark of the file as a whole; single columns may differ.</summary>
    public char DecimalMark { get; init; } = '.';

    /// <summary>Mark between thousands; null when none was seen.</summary>
    public char? ThousandsMark { get; init; }

    /// <summary>Rows that hold the names.</summary>
    public IReadOnlyList<int> HeaderRows { get; init; } = [];

    /// <summary>Row that holds the units; null when none does.</summary>
    public int? UnitRow { get; init; }

    /// <summary>Rows above, below and between that are no records.</summary>
    public IReadOnlyList<LeftOutRow> LeftOut { get; init; } = [];

    /// <summary>Texts read as missing, with at least one cell each.</summary>
    public IReadOnlyList<string> MissingCodes { get; init; } = [];

    /// <summary>Columns in the file's order.</summary>
    public IReadOnlyList<ColumnPreview> Columns { get; init; } = [];

    /// <summary>What the file does not settle.</summary>
    public IReadOnlyList<Doubt> Doubts { get; init; } = [];

    /// <summary>What was noticed.</summary>
    public IReadOnlyList<Finding> Findings { get; init; } = [];

    /// <summary>Number of records.</summary>
    public long Records { get; init; }

    /// <summary>Whether only the beginning was looked at, so that <see cref="Records"/> and the counts by column are estimates.</summary>
    public bool OnlyBeginning { get; init; }

    /// <summary>Whether it is a hand-over of this portal, read back with its kinds, units and states.</summary>
    public bool IsHandover { get; init; }
}
