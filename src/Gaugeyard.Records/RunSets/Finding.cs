using System.Text.Json.Serialization;

namespace Gaugeyard.Records.RunSets;

/// <summary>How much a finding matters.</summary>
[JsonConverter(typeof(JsonStringEnumConverter<Severity>))]
public enum Severity
{
    [JsonStringEnumMemberName("note")] Note,
    [JsonStringEnumMemberName("warning")] Warning,
    [JsonStringEnumMemberName("error")] Error,
}

/// <summary>Something that was noticed in a file or a write, with its place.</summary>
/// <param name="Severity">How much it matters.</param>
/// <param name="Column">The column's name, or null when it is about the whole file.</param>
/// <param name="Record">The record number (1-based), or null when it is about the whole column.</param>
/// <param name="Text">A sentence: what, where, and what was done or is to do.</param>
public sealed record Finding(Severity Severity, string? Column, int? Record, string Text);
