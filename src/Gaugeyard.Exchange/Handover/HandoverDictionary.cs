using System.Globalization;
using System.Text.Json;
using ExcelDataReader;
using Gaugeyard.Exchange.Text;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange.Handover;

/// <summary>What a hand-over workbook says about its own table.</summary>
internal sealed class HandoverDictionary
{
    /// <param name="Definition">The run set's column.</param>
    /// <param name="Value">Sheet column of its values, from 0.</param>
    /// <param name="Companions">Sheet columns of its companions.</param>
    public sealed record Entry(ColumnDefinition Definition, int Value, IReadOnlyList<int> Companions);

    /// <param name="Record">Number in the handed-over run set.</param>
    /// <param name="Column">Name of the column; "" for the record as a whole.</param>
    /// <param name="Mark">What is said about the cell.</param>
    /// <param name="Value">The cell's value at hand-over, as the sheet holds it.</param>
    public sealed record State(int Record, string Column, CellMark Mark, object? Value);

    public required IReadOnlyList<Entry> Columns { get; init; }

    public required IReadOnlyList<State> States { get; init; }

    /// <summary>Reads the dictionary of a workbook; null when it is no hand-over of this portal.</summary>
    public static HandoverDictionary? TryRead(ArrivingFile file, IReadOnlyList<string> sheets, string? chosenSheet, CancellationToken cancellationToken)
    {
        if (chosenSheet is not null and not HandoverWorkbook.Records || !sheets.Contains(HandoverWorkbook.Records) || !sheets.Contains(HandoverWorkbook.Columns) || !sheets.Contains(HandoverWorkbook.States))
            return null;
        List<Entry>? entries = null;
        var states = new List<State>();
        using var reader = ExcelReaderFactory.CreateOpenXmlReader(file.Open());
        do
        {
            if (reader.Name == HandoverWorkbook.Columns)
            {
                if (!Begins(reader, HandoverWorkbook.ColumnHeadings))
                    return null;
                entries = [];
                while (reader.Read())
                    if (ReadEntry(reader) is { } entry)
                        entries.Add(entry);
                    else
                        return null;
            }
            else if (reader.Name == HandoverWorkbook.States)
            {
                if (!Begins(reader, HandoverWorkbook.StateHeadings))
                    return null;
                while (reader.Read())
                {
                    if ((states.Count & 1023) == 0)
                        cancellationToken.ThrowIfCancellationRequested();
                    if (reader.GetValue(0) is double record && record is >= 1 and < int.MaxValue && HandoverTable.Parse<CellState>(Text(reader, 3)) is { } state)
                        states.Add(new State((int)record, Text(reader, 2), new CellMark(state)
                        {
                            Low = Number(reader, 5),
                            High = Number(reader, 6),
                            Confidence = Number(reader, 7),
                            Way = Optional(reader, 8),
                            Overridden = Text(reader, 9) == "yes",
                            Reason = Optional(reader, 10),
                            Original = Optional(reader, 11),
                        }, reader.GetValue(4)));
                }
            }
        }
        while (reader.NextResult());
        if (entries is not { Count: > 0 } || entries.Select(e => e.Definition.Name).Distinct(StringComparer.Ordinal).Count() != entries.Count || entries.Select(e => e.Value).Distinct().Count() != entries.Count)
            return null;
        return new HandoverDictionary { Columns = [.. entries.OrderBy(e => e.Value)], States = states };
    }

    private static bool Begins(IExcelDataReader reader, string[] headings) =>
        reader.Read() && reader.FieldCount >= headings.Length && Enumerable.Range(0, headings.Length).All(i => reader.GetValue(i) as string == headings[i]);

    private static Entry? ReadEntry(IExcelDataReader reader)
    {
        if (HandoverTable.Parse<ColumnKind>(Text(reader, 1)) is not { } kind || HandoverTable.Parse<ColumnRole>(Text(reader, 2)) is not { } role || reader.GetValue(9) is not double position || position is < 2 or > SheetBounds.Columns)
            return null;
        var definition = new ColumnDefinition(Text(reader, 0), kind)
        {
            Role = role,
            Unit = Optional(reader, 3),
            Levels = List(reader, 4),
            MissingCodes = List(reader, 5) ?? [],
        };
        return new Entry(definition, (int)position - 1, [.. new[] { 10, 11, 12 }.Select(i => reader.GetValue(i)).OfType<double>().Where(p => p is >= 1 and <= SheetBounds.Columns).Select(p => (int)p - 1)]);
    }

    private static string Text(IExcelDataReader reader, int at) => at >= reader.FieldCount ? "" : reader.GetValue(at) switch
    {
        null => "",
        string text => text,
        IFormattable value => value.ToString(null, CultureInfo.InvariantCulture),
        var other => other.ToString() ?? "",
    };

    private static string? Optional(IExcelDataReader reader, int at) => Text(reader, at) is { Length: > 0 } text ? text : null;

    private static double? Number(IExcelDataReader reader, int at) => at < reader.FieldCount && reader.GetValue(at) is double number ? number : null;

    private static List<string>? List(IExcelDataReader reader, int at)
    {
        try
        {
            return Optional(reader, at) is { } json ? JsonSerializer.Deserialize<List<string>>(json) : null;
        }
        catch (JsonException)
        {
            return null;
        }
    }
}
