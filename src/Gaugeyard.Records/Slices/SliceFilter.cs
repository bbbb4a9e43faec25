using System.Globalization;
using System.Text.Json;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Records.Slices;

/// <summary>Picks the records of a revision that meet every condition of a slice.</summary>
public static class SliceFilter
{
    /// <summary>One flag per row: whether the record meets all conditions. O(rows x conditions).</summary>
    /// <exception cref="SliceException">A condition names no column, or asks something the column cannot answer.</exception>
    public static bool[] Select(RevisionContent content, IReadOnlyList<SliceCondition> conditions)
    {
        var keep = new bool[content.Count];
        Array.Fill(keep, true);
        foreach (var condition in conditions)
        {
            if (content.Find(condition.Column) is null)
                throw new SliceException($"The slice names a column '{condition.Column}', but this run set has none of that name. Choose one of its columns.");
            var column = content.Column(condition.Column);
            var test = Test(content, column, condition);
            for (int row = 0; row < keep.Length; row++)
                keep[row] &= test(row);
        }
        return keep;
    }

    private static Func<int, bool> Test(RevisionContent content, Column column, SliceCondition condition)
    {
        if (condition.State is { } state)
            return row => content.StateOf(column, row) is var s && (s == state || (state == CellState.Measured && s == CellState.Corrected));
        if (condition.Is is { } allowed)
            return IsOneOf(column, allowed);
        if (condition.From is null && condition.To is null)
            throw new SliceException($"The condition on '{column.Name}' says neither which values, nor from where to where, nor which state.");
        return column switch
        {
            NumberColumn number => Between(number, condition),
            DateTimeColumn date => Between(date, condition),
            _ => throw new SliceException($"'{column.Name}' is a {Word(column)}: pick values of it instead of a range."),
        };
    }

    private static Func<int, bool> IsOneOf(Column column, IReadOnlyList<JsonElement> allowed)
    {
        bool missing = allowed.Any(a => a.ValueKind is JsonValueKind.Null);
        switch (column)
        {
            case NumberColumn number:
                var numbers = allowed.Where(a => a.ValueKind is not JsonValueKind.Null).Select(a => Number(column, a)).ToHashSet();
                return row => number.IsMissing(row) ? missing : numbers.Contains(number.Values[row]);
            case CodedColumn coded:
                var texts = allowed.Select(Text).ToHashSet(StringComparer.Ordinal);
                var wanted = coded.Levels.Select(texts.Contains).ToArray();
                return row => coded.Codes[row] < 0 ? missing : wanted[coded.Codes[row]];
            default:
                var dates = (DateTimeColumn)column;
                var ticks = allowed.Where(a => a.ValueKind is not JsonValueKind.Null).Select(a => Date(column, a)).ToHashSet();
                return row => dates.IsMissing(row) ? missing : ticks.Contains(dates.Ticks[row]);
        }
    }

    private static Func<int, bool> Between(NumberColumn column, SliceCondition condition)
    {
        double from = condition.From is { ValueKind: not JsonValueKind.Null } f ? Number(column, f) : double.NegativeInfinity;
        double to = condition.To is { ValueKind: not JsonValueKind.Null } t ? Number(column, t) : double.PositiveInfinity;
        return row => column.Values[row] >= from && column.Values[row] <= to;
    }

    private static Func<int, bool> Between(DateTimeColumn column, SliceCondition condition)
    {
        long from = condition.From is { ValueKind: not JsonValueKind.Null } f ? Date(column, f) : long.MinValue + 1;
        long to = condition.To is { ValueKind: not JsonValueKind.Null } t ? Date(column, t) : long.MaxValue;
        // a bare day as upper end means the whole day
        if (condition.To is { ValueKind: JsonValueKind.String } text && text.GetString()!.Length == 10)
            to += TimeSpan.TicksPerDay - 1;
        return row => !column.IsMissing(row) && column.Ticks[row] >= from && column.Ticks[row] <= to;
    }

    private static string Text(JsonElement value) => value.ValueKind switch
    {
        JsonValueKind.String => value.GetString()!,
        JsonValueKind.True => "yes",
        JsonValueKind.False => "no",
        _ => value.GetRawText(),
    };

    private static double Number(Column column, JsonElement value)
    {
        if (value.ValueKind == JsonValueKind.Number)
            return value.GetDouble();
        if (value.ValueKind == JsonValueKind.String && double.TryParse(value.GetString(), NumberStyles.Float, CultureInfo.InvariantCulture, out double number))
            return number;
        throw new SliceException($"'{column.Name}' holds numbers, but the slice asks for {value.GetRawText()}. Give a number.");
    }

    private static long Date(Column column, JsonElement value)
    {
        if (value.ValueKind == JsonValueKind.String && DateTime.TryParse(value.GetString(), CultureInfo.InvariantCulture, DateTimeStyles.None, out var at))
            return at.Ticks;
        throw new SliceException($"'{column.Name}' holds dates, but the slice asks for {value.GetRawText()}. Give a date such as 2031-04-03.");
    }

    private static string Word(Column column) => column.Definition.Kind switch
    {
        ColumnKind.OrderedCategory => "ordered category",
        ColumnKind.YesNo => "yes/no column",
        ColumnKind.Text => "text column",
        _ => "category",
    };
}

/// <summary>A slice that cannot be applied; the message is a sentence for its user.</summary>
public sealed class SliceException(string message) : Exception(message);
