using System.Buffers.Binary;
using System.Runtime.InteropServices;
using System.Text.Json;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Api;

/// <summary>Questions about pairs of readings, and the points of a scatter matrix in binary form.</summary>
internal static class PairsRoutes
{
    public static void MapPairs(this RouteGroupBuilder runSets)
    {
        runSets.MapQuestion<StandoutsQuestion, StandoutsAnswer>("standouts");
        runSets.MapPost("{id}/points", async (string id, HttpContext http, IRunSetStore store, CancellationToken cancel) =>
        {
            var (question, _) = await QuestionRoutes.ReadAsync<PointsQuestion>(http, cancel);
            var content = await RunSetRoutes.OpenAsync(store, id, question.Revision, cancel);
            var points = await Task.Run(() => question.Collect(content), cancel);
            return Results.Stream(body => PointWriter.WriteAsync(points, body, cancel), "application/octet-stream");
        }).Accepts<PointsQuestion>("application/json").Produces(200, contentType: "application/octet-stream").ProducesProblem(400).ProducesProblem(404).WithName("points").WithTags("Questions");
    }
}

/// <summary>
/// Points as bytes, little-endian: length of the head (uint32), the head as JSON padded with blanks so that what follows starts at a multiple of 8, then
/// the arrays one after the other, each starting at a multiple of 8 at the place that the head names.
/// </summary>
internal static class PointWriter
{
    /// <summary>Up to here readings go as doubles; beyond as singles, which are exact to seven figures and half as long.</summary>
    public const int ExactUpTo = 200_000;

    public static async Task WriteAsync(PointColumns points, Stream body, CancellationToken cancel)
    {
        int n = points.Records.Length;
        bool exact = n <= ExactUpTo;
        var arrays = new List<(string Name, string Type, byte[] Bytes)>();
        foreach (double[] values in points.Values)
            arrays.Add(("reading", exact ? "float64" : "float32", exact ? Bytes(values) : Bytes(Array.ConvertAll(values, v => (float)v))));
        arrays.Add(("records", "uint32", Bytes(points.Records)));
        if (points.Colours is not null)
            arrays.Add(("colours", "uint16", Bytes(points.Colours)));
        if (points.Filled is not null)
            arrays.Add(("filled", "uint8", points.Filled));
        long at = 0;
        var places = new List<object>();
        foreach (var (name, type, bytes) in arrays)
        {
            places.Add(new { name, type, at });
            at += (bytes.Length + 7) / 8 * 8;
        }
        byte[] head = JsonSerializer.SerializeToUtf8Bytes(new { count = n, readings = points.Readings, units = points.Units.Select(Records.Units.Unit.LabelOf), colour = points.Colour, levels = points.Levels, arrays = places }, WireFormat.Json);
        int padded = (head.Length + 4 + 7) / 8 * 8 - 4;
        var length = new byte[4];
        BinaryPrimitives.WriteUInt32LittleEndian(length, (uint)padded);
        await body.WriteAsync(length, cancel);
        await body.WriteAsync(head, cancel);
        await WriteBlanksAsync(body, padded - head.Length, (byte)' ', cancel);
        foreach (var (_, _, bytes) in arrays)
        {
            await body.WriteAsync(bytes, cancel);
            await WriteBlanksAsync(body, (8 - bytes.Length % 8) % 8, 0, cancel);
        }
    }

    private static async Task WriteBlanksAsync(Stream body, int count, byte value, CancellationToken cancel)
    {
        if (count <= 0)
            return;
        var blanks = new byte[count];
        Array.Fill(blanks, value);
        await body.WriteAsync(blanks, cancel);
    }

    // the platforms .NET 10 runs the portal on are little-endian; a test holds the layout
    private static byte[] Bytes<T>(T[] values)
        where T : unmanaged => MemoryMarshal.AsBytes<T>(values).ToArray();
}
