using System.Text.Json;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange.Handover;

/// <summary>
/// Writes a revision as an .xlsx workbook with the sheets Records, Filled cells, Cell states, Columns, Ledger, Method and
/// cautions. Numbers are written with every digit that they need. Filled, corrected and set-aside cells are shaded and named in companion columns. The sheets Columns and Cell
/// states let the portal read the workbook back with every kind, role, unit and state.
/// </summary>
public static class HandoverWorkbook
{
    internal const string Records = "Records", Filled = "Filled cells", States = "Cell states", Columns = "Columns", Ledger = "Ledger", Method = "Method and cautions";

    internal static readonly string[] ColumnHeadings = ["name", "kind", "role", "unit", "levels", "missing codes", "known", "missing", "filled", "stands in sheet column", "state in", "low in", "high in"];

    internal static readonly string[] StateHeadings = ["record", "run name", "column", "state", "value", "low", "high", "confidence", "way", "overridden", "reason", "original"];

    /// <summary>Writes the workbook.</summary>
    /// <param name="target">Receives the file; need not be seekable.</param>
    /// <param name="content">The revision with its run set and ledger.</param>
    /// <param name="cancel">Stops the writing.</param>
    /// <exception cref="ArgumentException">A sheet cannot hold so many records or columns.</exception>
    public static void Write(Stream target, HandoverContent content, CancellationToken cancel = default)
    {
        using var writer = new StreamedWorkbook(target);
        var table = new HandoverTable(content);
        if (table.Records >= SheetBounds.Rows || table.Columns.Count >= SheetBounds.Columns)
            throw new ArgumentException($"a sheet holds at most {SheetBounds.Rows - 1:N0} records and {SheetBounds.Columns - 1:N0} columns but there are {table.Records:N0} and {table.Columns.Count:N0}; hand over as CSV");
        WriteRecords(writer, table, cancel);
        WriteFilled(writer, table);
        WriteStates(writer, table, cancel);
        WriteColumns(writer, table);
        WriteLedger(writer, table);
        writer.BeginSheet(Method, [16, 120]);
        Headings(writer, "what", "text");
        foreach (var (heading, text) in Cautions.Lines(table))
        {
            writer.BeginRow();
            writer.Text(heading);
            writer.Text(text, CellLook.Wrapped);
        }
        writer.Finish();
    }

    private static void WriteRecords(StreamedWorkbook writer, HandoverTable table, CancellationToken cancel)
    {
        writer.BeginSheet(Records, [8, .. table.Columns.Select(c => Math.Clamp(c.Name.Length + 2, 9, 32))], 1);
        Headings(writer, ["record", .. table.Columns.Select(c => c.Name)]);
        for (int row = 0; row < table.Records; row++)
        {
            if ((row & 1023) == 0)
                cancel.ThrowIfCancellationRequested();
            int record = table.NumberOf(row);
            bool aside = table.Content.Revision.SetAside.ContainsKey(record);
            writer.BeginRow();
            writer.Number(record, aside ? CellLook.SetAside : CellLook.Plain);
            foreach (var column in table.Columns)
            {
                if (column.Holds == Holds.Value)
                {
                    var look = aside ? CellLook.SetAside
                        : !table.Marks[column.Of].TryGetValue(record, out var mark) ? CellLook.Plain
                        : mark.State switch { CellState.Filled => CellLook.Filled, CellState.Corrected => CellLook.Corrected, CellState.SetAside => CellLook.SetAside, _ => CellLook.Plain };
                    WriteValue(writer, table.Values[column.Of], row, look);
                    continue;
                }
                switch (table.CompanionAt(column, row))
                {
                    case double number:
                        writer.Number(number);
                        break;
                    case string text:
                        writer.Text(Fit(text));
                        break;
                    default:
                        writer.Blank();
                        break;
                }
            }
        }
    }

    private static void WriteValue(StreamedWorkbook writer, Column column, int row, CellLook look = CellLook.Plain)
    {
        switch (column)
        {
            case var c when c.IsMissing(row):
                writer.Blank(look);
                break;
            case NumberColumn numbers:
                writer.Number(numbers.Values[row], look);
                break;
            case DateTimeColumn dates when SheetBounds.HoldsDate(dates.Ticks[row]):
                writer.Date(new DateTime(dates.Ticks[row]), look switch { CellLook.Filled => CellLook.FilledDate, CellLook.Corrected => CellLook.CorrectedDate, CellLook.SetAside => CellLook.SetAsideDate, _ => CellLook.Date });
                break;
            default:
                writer.Text(Fit(column.TextAt(row)!), look);
                break;
        }
    }

    private static void WriteFilled(StreamedWorkbook writer, HandoverTable table)
    {
        writer.BeginSheet(Filled, [8, 20, 24, 12, 12, 12, 11, 24]);
        Headings(writer, "record", "run name", "column", "value", "low", "high", "confidence", "way");
        for (int c = 0; c < table.Values.Count; c++)
            foreach (var (record, mark) in table.Marks[c].Where(m => m.Value.State == CellState.Filled).OrderBy(m => m.Key))
            {
                int row = table.Content.Revision.Numbers.RowOf(record);
                if (row < 0)
                    continue;
                writer.BeginRow();
                writer.Number(record);
                Optional(writer, table.LabelOf(row));
                writer.Text(Fit(table.Values[c].Name));
                WriteValue(writer, table.Values[c], row, CellLook.Filled);
                Optional(writer, mark.Low);
                Optional(writer, mark.High);
                Optional(writer, mark.Confidence);
                Optional(writer, mark.Way);
            }
    }

    private static void WriteStates(StreamedWorkbook writer, HandoverTable table, CancellationToken cancel)
    {
        writer.BeginSheet(States, [8, 20, 24, 12, 12, 12, 12, 11, 24, 11, 40, 24]);
        Headings(writer, StateHeadings);
        foreach (var (record, reason) in table.Content.Revision.SetAside.OrderBy(s => s.Key))
        {
            int row = table.Content.Revision.Numbers.RowOf(record);
            if (row < 0)
                continue;
            writer.BeginRow();
            writer.Number(record);
            Optional(writer, table.LabelOf(row));
            writer.Blank();
            writer.Text(HandoverTable.Say(CellState.SetAside));
            for (int k = 0; k < 6; k++)
                writer.Blank();
            Optional(writer, reason);
        }
        for (int c = 0; c < table.Values.Count; c++)
        {
            cancel.ThrowIfCancellationRequested();
            foreach (var (record, mark) in table.Marks[c].OrderBy(m => m.Key))
            {
                int row = table.Content.Revision.Numbers.RowOf(record);
                if (row < 0)
                    continue;
                writer.BeginRow();
                writer.Number(record);
                Optional(writer, table.LabelOf(row));
                writer.Text(Fit(table.Values[c].Name));
                writer.Text(HandoverTable.Say(mark.State));
                WriteValue(writer, table.Values[c], row);
                Optional(writer, mark.Low);
                Optional(writer, mark.High);
                Optional(writer, mark.Confidence);
                Optional(writer, mark.Way);
                if (mark.Overridden)
                    writer.Text("yes");
                else
                    writer.Blank();
                Optional(writer, mark.Reason);
                Optional(writer, mark.Original);
            }
        }
    }

    private static void WriteColumns(StreamedWorkbook writer, HandoverTable table)
    {
        writer.BeginSheet(Columns, [28, 18, 12, 14, 40, 24, 10, 10, 10, 22, 24, 24, 24]);
        Headings(writer, ColumnHeadings);
        for (int c = 0; c < table.Values.Count; c++)
        {
            var column = table.Values[c];
            var definition = column.Definition;
            int filled = 0, known = 0;
            for (int row = 0; row < table.Records; row++)
                if (!column.IsMissing(row))
                    known++;
            foreach (var (record, mark) in table.Marks[c])
                if (mark.State == CellState.Filled && table.Content.Revision.Numbers.RowOf(record) is >= 0 and var at && !column.IsMissing(at))
                    filled++;
            writer.BeginRow();
            writer.Text(Fit(definition.Name));
            writer.Text(HandoverTable.Say(definition.Kind));
            writer.Text(HandoverTable.Say(definition.Role));
            Optional(writer, definition.Unit);
            Optional(writer, definition.Levels is null ? null : JsonSerializer.Serialize(definition.Levels, Plain));
            Optional(writer, definition.MissingCodes.Count == 0 ? null : JsonSerializer.Serialize(definition.MissingCodes, Plain));
            writer.Number(known - filled);
            writer.Number(table.Records - known);
            writer.Number(filled);
            writer.Number(Position(table, c, Holds.Value));
            foreach (var holds in new[] { Holds.State, Holds.Low, Holds.High })
                if (table.Columns.Any(x => x.Of == c && x.Holds == holds))
                    writer.Number(Position(table, c, holds));
                else
                    writer.Blank();
        }
    }

    internal static readonly JsonSerializerOptions Plain = new() { Encoder = System.Text.Encodings.Web.JavaScriptEncoder.UnsafeRelaxedJsonEscaping };

    // sheet column from 1; the record's number stands in the first
    private static int Position(HandoverTable table, int column, Holds holds)
    {
        for (int i = 0; i < table.Columns.Count; i++)
            if (table.Columns[i].Of == column && table.Columns[i].Holds == holds)
                return i + 2;
        return 0;
    }

    private static void WriteLedger(StreamedWorkbook writer, HandoverTable table)
    {
        writer.BeginSheet(Ledger, [10, 22, 16, 14, 60, 60, 40]);
        Headings(writer, "revision", "at", "by", "kind", "note", "settings", "fingerprint");
        foreach (var entry in table.Content.Ledger)
        {
            writer.BeginRow();
            writer.Number(entry.Revision);
            writer.Text(entry.At.ToString("yyyy-MM-dd'T'HH:mm:ssK"));
            writer.Text(Fit(entry.By));
            writer.Text(entry.Kind);
            Optional(writer, entry.Note);
            Optional(writer, entry.Settings?.GetRawText());
            writer.Text(entry.Fingerprint);
        }
    }

    private static void Headings(StreamedWorkbook writer, params IEnumerable<string> names)
    {
        writer.BeginRow();
        foreach (string name in names)
            writer.Text(Fit(name), CellLook.Heading);
    }

    private static void Optional(StreamedWorkbook writer, string? text)
    {
        if (string.IsNullOrEmpty(text))
            writer.Blank();
        else
            writer.Text(Fit(text));
    }

    private static void Optional(StreamedWorkbook writer, double? number)
    {
        if (number is { } value && double.IsFinite(value))
            writer.Number(value);
        else
            writer.Blank();
    }

    // a sheet's cell holds no more; the CSV and JSON hand-overs hold texts of any length
    private static string Fit(string text) => text.Length <= SheetBounds.CellCharacters ? text : text[..(SheetBounds.CellCharacters - 1)] + "…";
}
