using System.Globalization;
using System.Text;
using System.Text.Json;
using Gaugeyard.Portal.Plots;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Portal.Pages.Matrix;

/// <summary>What a selection of the matrix means for the run set: its conditions as a slice, and its record numbers.</summary>
internal static class Chosen
{
    /// <summary>More names than this do not fit an address.</summary>
    private const int MostNames = 60;

    /// <summary>A slice that holds exactly the selected records: by ranges where the selection is of ranges, else by name; null when neither can say it.</summary>
    public static IReadOnlyList<SliceCondition>? Slice(RevisionContent content, MatrixSelection selection) =>
        selection.Conditions is { } ranges
            ? [.. ranges.Where(r => r.From is not null || r.To is not null).Select(r => new SliceCondition(r.Column) { From = Element(r.From), To = Element(r.To) })]
            : selection.Complete ? ByName(content, selection.Records) : null;

    /// <summary>Conditions that pick these records by vehicle, when they are all the records of some vehicles, or else by run name; null when no column tells them apart.</summary>
    public static IReadOnlyList<SliceCondition>? ByName(RevisionContent content, IReadOnlyList<int> records)
    {
        foreach (var role in (ReadOnlySpan<ColumnRole>)[ColumnRole.Vehicle, ColumnRole.RunName])
        {
            if (content.FindRole(role) is not { } definition || content.Column(definition.Name) is not CodedColumn column)
                continue;
            int[] rows = [.. records.Select(content.Numbers.RowOf).Where(r => r >= 0 && column.Codes[r] >= 0)];
            var levels = rows.Select(r => column.Codes[r]).ToHashSet();
            if (levels.Count <= MostNames && rows.Length == records.Count && column.Codes.Count(levels.Contains) == records.Count)
                return [new SliceCondition(definition.Name) { Is = [.. levels.Select(k => JsonSerializer.SerializeToElement(column.Levels[k]))] }];
        }
        return null;
    }

    /// <summary>Record numbers of a selection within a slice; null when it is too large to name and not of ranges.</summary>
    public static IReadOnlyList<int>? Records(RevisionContent content, IReadOnlyList<SliceCondition> within, MatrixSelection selection)
    {
        if (selection.Complete)
            return selection.Records;
        if (selection.Conditions is null)
            return null;
        bool[] keep = SliceFilter.Select(content, [.. within, .. Slice(content, selection)!]);
        return [.. Enumerable.Range(0, keep.Length).Where(row => keep[row]).Select(row => content.Numbers[row]).Where(r => !content.SetAside.ContainsKey(r))];
    }

    /// <summary>The canvas in a frame of SVG, since that is what a Brief holds; width and height stand at bytes 16 to 23 of every PNG.</summary>
    public static string Picture(byte[] png)
    {
        int width = System.Buffers.Binary.BinaryPrimitives.ReadInt32BigEndian(png.AsSpan(16)), height = System.Buffers.Binary.BinaryPrimitives.ReadInt32BigEndian(png.AsSpan(20));
        return new StringBuilder()
            .Append(CultureInfo.InvariantCulture, $"<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width} {height}\" width=\"{width}\" height=\"{height}\" role=\"img\"><title>Scatter matrix</title><image width=\"{width}\" height=\"{height}\" href=\"data:image/png;base64,")
            .Append(Convert.ToBase64String(png)).Append("\"/></svg>").ToString();
    }

    private static JsonElement? Element(double? value) => value is { } v ? JsonSerializer.SerializeToElement(v) : null;
}
