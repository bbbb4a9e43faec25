using System.Text.Json.Serialization;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange;

/// <summary>Which part of a written date comes first.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<DateOrder>))]
public enum DateOrder
{
    [JsonStringEnumMemberName("day first")] DayFirst,
    [JsonStringEnumMemberName("month first")] MonthFirst,
    [JsonStringEnumMemberName("year first")] YearFirst,
}

/// <summary>What a user says about one column; whatever is null is detected.</summary>
/// <param name="Name">The column's name as the preview shows it.</param>
public sealed record ColumnChoice(string Name)
{
    /// <summary>What its values are.</summary>
    public ColumnKind? Kind { get; init; }

    /// <summary>Its unit: a code that <see cref="Gaugeyard.Records.Units.Unit"/> knows, or free text; "" for none.</summary>
    public string? Unit { get; init; }

    /// <summary>What it is for.</summary>
    public ColumnRole? Role { get; init; }

    /// <summary>Levels of an ordered category from lowest to highest.</summary>
    public IReadOnlyList<string>? Levels { get; init; }

    /// <summary>Texts that mean "missing" in this column, instead of the detected ones.</summary>
    public IReadOnlyList<string>? MissingCodes { get; init; }

    /// <summary>Decimal mark of this column.</summary>
    public char? DecimalMark { get; init; }

    /// <summary>Order of the parts of this column's dates.</summary>
    public DateOrder? DateOrder { get; init; }
}

/// <summary>
/// Everything about a file that a user may overrule; what is null or absent is detected. Rows are numbered from 1 as the
/// file or sheet numbers them.
/// </summary>
public sealed record ReadChoices
{
    /// <summary>Nothing overruled.</summary>
    public static ReadChoices Detected { get; } = new();

    /// <summary>Sheet of a workbook.</summary>
    public string? Sheet { get; init; }

    /// <summary>Range of a sheet, for example "B3:W2019".</summary>
    public string? Range { get; init; }

    /// <summary>Rows that hold the column names, one to three; an empty list for none.</summary>
    public IReadOnlyList<int>? HeaderRows { get; init; }

    /// <summary>Row that holds the units; 0 for none.</summary>
    public int? UnitRow { get; init; }

    /// <summary>What separates the fields of a text file.</summary>
    public char? Delimiter { get; init; }

    /// <summary>Encoding of a text file: "utf-8", "utf-16", "utf-16be" or "windows-1252".</summary>
    public string? Encoding { get; init; }

    /// <summary>Decimal mark, for all columns.</summary>
    public char? DecimalMark { get; init; }

    /// <summary>Mark between thousands, for all columns.</summary>
    public char? ThousandsMark { get; init; }

    /// <summary>Texts that mean "missing" anywhere in the file, instead of the usual ones.</summary>
    public IReadOnlyList<string>? MissingCodes { get; init; }

    /// <summary>Order of the parts of dates, for all columns.</summary>
    public DateOrder? DateOrder { get; init; }

    /// <summary>Keeps spellings of a category apart that differ only in capitals or blanks, even where one is rare.</summary>
    public bool KeepSpellings { get; init; }

    /// <summary>Overrides for single columns, by name.</summary>
    public IReadOnlyList<ColumnChoice> Columns { get; init; } = [];

    /// <summary>These choices with a doubt settled.</summary>
    /// <param name="doubt">A doubt of the preview.</param>
    /// <param name="value">The value of one of its choices.</param>
    public ReadChoices Settle(Doubt doubt, string value) =>
        With(doubt.Column, doubt.About switch
        {
            DoubtAbout.DateOrder => c => c with { DateOrder = value == "month first" ? Exchange.DateOrder.MonthFirst : Exchange.DateOrder.DayFirst },
            DoubtAbout.Gallon => c => c with { Unit = value },
            _ => c => c with { DecimalMark = value[0] },
        });

    /// <summary>These choices with one column's choice changed.</summary>
    public ReadChoices With(string column, Func<ColumnChoice, ColumnChoice> change)
    {
        var now = Columns.FirstOrDefault(c => c.Name == column) ?? new ColumnChoice(column);
        return this with { Columns = [.. Columns.Where(c => c.Name != column), change(now)] };
    }
}
