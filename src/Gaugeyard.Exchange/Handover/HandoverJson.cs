using System.Text.Json;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Exchange.Handover;

/// <summary>Writes a revision as one JSON object: what it is, its dictionary of columns, its records with their states, its ledger and its cautions.</summary>
public static class HandoverJson
{
    /// <summary>Writes the file.</summary>
    public static void Write(Stream target, HandoverContent content, CancellationToken cancel = default)
    {
        var table = new HandoverTable(content);
        using var json = new Utf8JsonWriter(target, new JsonWriterOptions { Encoder = HandoverWorkbook.Plain.Encoder });
        json.WriteStartObject();
        json.WriteString("form", Cautions.Form);
        json.WriteString("name", content.RunSet.Name);
        json.WriteNumber("revision", content.Revision.Revision);
        json.WriteString("fingerprint", content.Revision.Fingerprint);
        json.WriteStartArray("columns");
        foreach (var column in table.Values)
        {
            var d = column.Definition;
            json.WriteStartObject();
            json.WriteString("name", d.Name);
            json.WriteString("kind", HandoverTable.Say(d.Kind));
            json.WriteString("role", HandoverTable.Say(d.Role));
            json.WriteString("unit", d.Unit);
            Texts(json, "levels", d.Levels);
            Texts(json, "missingCodes", d.MissingCodes);
            json.WriteEndObject();
        }
        json.WriteEndArray();
        json.WriteStartArray("records");
        for (int row = 0; row < table.Records; row++)
        {
            if ((row & 1023) == 0)
            {
                cancel.ThrowIfCancellationRequested();
                json.Flush();
            }
            Record(json, table, row);
        }
        json.WriteEndArray();
        json.WriteStartArray("ledger");
        foreach (var entry in content.Ledger)
        {
            json.WriteStartObject();
            json.WriteNumber("revision", entry.Revision);
            json.WriteString("at", entry.At);
            json.WriteString("by", entry.By);
            json.WriteString("kind", entry.Kind);
            json.WriteString("note", entry.Note);
            json.WritePropertyName("settings");
            if (entry.Settings is { } settings)
                settings.WriteTo(json);
            else
                json.WriteNullValue();
            json.WriteString("fingerprint", entry.Fingerprint);
            json.WriteEndObject();
        }
        json.WriteEndArray();
        Texts(json, "cautions", Cautions.Sentences);
        json.WriteEndObject();
    }

    private static void Record(Utf8JsonWriter json, HandoverTable table, int row)
    {
        int record = table.NumberOf(row);
        json.WriteStartObject();
        json.WriteNumber("record", record);
        if (table.Content.Revision.SetAside.TryGetValue(record, out string? reason))
            json.WriteString("setAside", reason);
        json.WriteStartObject("values");
        for (int c = 0; c < table.Values.Count; c++)
        {
            json.WritePropertyName(table.Values[c].Name);
            switch (table.Values[c].ValueAt(row))
            {
                case null:
                    json.WriteNullValue();
                    break;
                case double number:
                    json.WriteNumberValue(number);
                    break;
                case bool yes:
                    json.WriteBooleanValue(yes);
                    break;
                default:
                    json.WriteStringValue(table.Values[c].TextAt(row));
                    break;
            }
        }
        json.WriteEndObject();
        bool any = false;
        for (int c = 0; c < table.Values.Count; c++)
        {
            if (!table.Marks[c].TryGetValue(record, out var mark))
                continue;
            if (!any)
                json.WriteStartObject("states");
            any = true;
            json.WriteStartObject(table.Values[c].Name);
            json.WriteString("state", HandoverTable.Say(mark.State));
            Number(json, "low", mark.Low);
            Number(json, "high", mark.High);
            Number(json, "confidence", mark.Confidence);
            if (mark.Way is not null)
                json.WriteString("way", mark.Way);
            if (mark.Overridden)
                json.WriteBoolean("overridden", true);
            if (mark.Reason is not null)
                json.WriteString("reason", mark.Reason);
            if (mark.Original is not null)
                json.WriteString("original", mark.Original);
            json.WriteEndObject();
        }
        if (any)
            json.WriteEndObject();
        json.WriteEndObject();
    }

    private static void Number(Utf8JsonWriter json, string name, double? value)
    {
        if (value is { } number && double.IsFinite(number))
            json.WriteNumber(name, number);
    }

    private static void Texts(Utf8JsonWriter json, string name, IReadOnlyList<string>? texts)
    {
        json.WritePropertyName(name);
        if (texts is null)
        {
            json.WriteNullValue();
            return;
        }
        json.WriteStartArray();
        foreach (string text in texts)
            json.WriteStringValue(text);
        json.WriteEndArray();
    }
}
