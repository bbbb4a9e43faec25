using System.Text.Json.Serialization;

namespace Gaugeyard.Records.Columns;

/// <summary>What the values of a column are.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<ColumnKind>))]
public enum ColumnKind
{
    [JsonStringEnumMemberName("number")] Number,
    [JsonStringEnumMemberName("category")] Category,
    [JsonStringEnumMemberName("ordered category")] OrderedCategory,
    [JsonStringEnumMemberName("yes/no")] YesNo,
    [JsonStringEnumMemberName("date-time")] DateTime,
    [JsonStringEnumMemberName("text")] Text,
}

/// <summary>What a column is for in the job.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<ColumnRole>))]
public enum ColumnRole
{
    [JsonStringEnumMemberName("attribute")] Attribute,
    [JsonStringEnumMemberName("reading")] Reading,
    [JsonStringEnumMemberName("vehicle")] Vehicle,
    [JsonStringEnumMemberName("run name")] RunName,
    [JsonStringEnumMemberName("distance")] Distance,
    [JsonStringEnumMemberName("note")] Note,
}

/// <summary>How the value of one cell came about.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<CellState>))]
public enum CellState
{
    [JsonStringEnumMemberName("measured")] Measured,
    [JsonStringEnumMemberName("missing")] Missing,
    [JsonStringEnumMemberName("corrected")] Corrected,
    [JsonStringEnumMemberName("filled")] Filled,
    [JsonStringEnumMemberName("set aside")] SetAside,
}
