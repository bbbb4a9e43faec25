using System.Globalization;

namespace Gaugeyard.Records.Columns;

/// <summary>
/// The values of one column in file order. Immutable by convention: nobody writes into the arrays of a column that was
/// handed out; an edit makes a new column. Safe to read from any thread.
/// </summary>
public abstract class Column(ColumnDefinition definition)
{
    /// <summary>What the column is.</summary>
    public ColumnDefinition Definition { get; } = definition;

    /// <summary>The column's name.</summary>
    public string Name => Definition.Name;

    /// <summary>Number of records.</summary>
    public abstract int Count { get; }

    /// <summary>Whether the record at this row (0-based) has no value.</summary>
    public abstract bool IsMissing(int row);

    /// <summary>The value as text that reads back to the same value; null when missing.</summary>
    public abstract string? TextAt(int row);

    /// <summary>The value as a double, string, bool or DateTime; null when missing.</summary>
    public abstract object? ValueAt(int row);

    /// <summary>The same values under another definition of the same kind.</summary>
    public abstract Column With(ColumnDefinition definition);

    /// <summary>Number of records that have a value.</summary>
    public int KnownCount()
    {
        int known = 0;
        for (int row = 0; row < Count; row++)
            if (!IsMissing(row))
                known++;
        return known;
    }
}

/// <summary>Numbers; NaN stands for missing and nothing else (infinities are never stored).</summary>
public sealed class NumberColumn(ColumnDefinition definition, double[] values) : Column(definition)
{
    /// <summary>One value per record; NaN when missing.</summary>
    public double[] Values { get; } = values;

    public override int Count => Values.Length;

    public override bool IsMissing(int row) => double.IsNaN(Values[row]);

    public override string? TextAt(int row) => IsMissing(row) ? null : Values[row].ToString("R", CultureInfo.InvariantCulture);

    public override object? ValueAt(int row) => IsMissing(row) ? null : Values[row];

    public override Column With(ColumnDefinition definition) => new NumberColumn(definition, Values);
}

/// <summary>
/// Category, ordered category, yes/no and text: a dictionary and one code per record, -1 when missing.
/// Levels stand in order of first appearance, except for ordered categories and yes/no ("no", "yes"). A level may have no record.
/// </summary>
public sealed class CodedColumn(ColumnDefinition definition, string[] levels, int[] codes) : Column(definition)
{
    /// <summary>The levels of a yes/no column.</summary>
    public static readonly string[] NoYes = ["no", "yes"];

    /// <summary>Distinct values.</summary>
    public string[] Levels { get; } = levels;

    /// <summary>One index into <see cref="Levels"/> per record; -1 when missing.</summary>
    public int[] Codes { get; } = codes;

    public override int Count => Codes.Length;

    public override bool IsMissing(int row) => Codes[row] < 0;

    public override string? TextAt(int row) => IsMissing(row) ? null : Levels[Codes[row]];

    public override object? ValueAt(int row) =>
        IsMissing(row) ? null : Definition.Kind == ColumnKind.YesNo ? Codes[row] == 1 : Levels[Codes[row]];

    public override Column With(ColumnDefinition definition) => new CodedColumn(definition, Levels, Codes);

    /// <summary>Codes texts in order of first appearance; null texts are missing.</summary>
    public static CodedColumn FromTexts(ColumnDefinition definition, IReadOnlyList<string?> texts)
    {
        var levels = new List<string>();
        var index = new Dictionary<string, int>(StringComparer.Ordinal);
        if (definition.Kind == ColumnKind.OrderedCategory || definition.Kind == ColumnKind.YesNo)
            foreach (string level in definition.Kind == ColumnKind.YesNo ? NoYes : definition.Levels ?? [])
                if (index.TryAdd(level, levels.Count))
                    levels.Add(level);
        var codes = new int[texts.Count];
        for (int row = 0; row < codes.Length; row++)
        {
            if (texts[row] is not { } text)
            {
                codes[row] = -1;
                continue;
            }
            if (!index.TryGetValue(text, out int code))
            {
                index.Add(text, code = levels.Count);
                levels.Add(text);
            }
            codes[row] = code;
        }
        return new CodedColumn(definition, [.. levels], codes);
    }
}

/// <summary>Dates and times without a zone, as the file wrote them, to 100 ns.</summary>
public sealed class DateTimeColumn(ColumnDefinition definition, long[] ticks) : Column(definition)
{
    /// <summary>Stands for a missing date.</summary>
    public const long Missing = long.MinValue;

    /// <summary>Ticks of <see cref="DateTime"/> per record; <see cref="Missing"/> when missing.</summary>
    public long[] Ticks { get; } = ticks;

    public override int Count => Ticks.Length;

    public override bool IsMissing(int row) => Ticks[row] == Missing;

    public override string? TextAt(int row)
    {
        if (IsMissing(row))
            return null;
        var at = new DateTime(Ticks[row]);
        return at.TimeOfDay == TimeSpan.Zero
            ? at.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture)
            : at.ToString(at.Ticks % TimeSpan.TicksPerSecond == 0 ? "yyyy-MM-ddTHH:mm:ss" : "yyyy-MM-ddTHH:mm:ss.fffffff", CultureInfo.InvariantCulture);
    }

    public override object? ValueAt(int row) => IsMissing(row) ? null : new DateTime(Ticks[row]);

    public override Column With(ColumnDefinition definition) => new DateTimeColumn(definition, Ticks);
}
