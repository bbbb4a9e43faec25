using System.Buffers.Binary;
using System.Text.Json;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Portal.Api;
using Xunit;

namespace Gaugeyard.Portal.Tests.Api;

/// <summary>The layout that wwwroot/pairs/points.js reads.</summary>
public sealed class PointWriterTests
{
    [Fact]
    public async Task Arrays_stand_where_the_head_says_on_multiples_of_eight()
    {
        var points = new PointColumns(["A", "Größe"], ["kg", null], [[1.5, double.NaN, 3], [10, 20, -0.25]], [0, 2, 0], "Kind", ["x", "y"], [1, ushort.MaxValue, 0], [4, 5, 9]);
        var (head, bytes) = await ReadAsync(points);

        Assert.Equal(3, head.GetProperty("count").GetInt32());
        Assert.Equal(["A", "Größe"], head.GetProperty("readings").EnumerateArray().Select(x => x.GetString()));
        Assert.Equal(["x", "y"], head.GetProperty("levels").EnumerateArray().Select(x => x.GetString()));
        var arrays = head.GetProperty("arrays").EnumerateArray().ToArray();
        Assert.Equal(["reading", "reading", "records", "colours", "filled"], arrays.Select(a => a.GetProperty("name").GetString()));
        Assert.All(arrays, a => Assert.Equal(0, a.GetProperty("at").GetInt64() % 8));
        ReadOnlySpan<byte> At(int k) => bytes.AsSpan((int)arrays[k].GetProperty("at").GetInt64());
        Assert.Equal(1.5, BinaryPrimitives.ReadDoubleLittleEndian(At(0)));
        Assert.True(double.IsNaN(BinaryPrimitives.ReadDoubleLittleEndian(At(0)[8..])));
        Assert.Equal(-0.25, BinaryPrimitives.ReadDoubleLittleEndian(At(1)[16..]));
        Assert.Equal(9u, BinaryPrimitives.ReadUInt32LittleEndian(At(2)[8..]));
        Assert.Equal(ushort.MaxValue, BinaryPrimitives.ReadUInt16LittleEndian(At(3)[2..]));
        Assert.Equal([0, 2, 0], At(4)[..3].ToArray());
    }

    [Fact]
    public async Task Very_many_records_go_as_singles()
    {
        int n = PointWriter.ExactUpTo + 1;
        var (head, bytes) = await ReadAsync(new PointColumns(["A"], [null], [[.. Enumerable.Range(0, n).Select(i => i / 8.0)]], null, null, [], null, [.. Enumerable.Range(1, n)]));
        var array = head.GetProperty("arrays")[0];
        Assert.Equal("float32", array.GetProperty("type").GetString());
        Assert.Equal((n - 1) / 8f, BinaryPrimitives.ReadSingleLittleEndian(bytes.AsSpan((int)array.GetProperty("at").GetInt64() + 4 * (n - 1))));
    }

    [Fact]
    public async Task No_record_at_all_is_still_a_head()
    {
        var (head, _) = await ReadAsync(new PointColumns(["A"], [null], [[]], null, null, [], null, []));
        Assert.Equal(0, head.GetProperty("count").GetInt32());
    }

    private static async Task<(JsonElement Head, byte[] Arrays)> ReadAsync(PointColumns points)
    {
        using var body = new MemoryStream();
        await PointWriter.WriteAsync(points, body, CancellationToken.None);
        byte[] bytes = body.ToArray();
        int length = (int)BinaryPrimitives.ReadUInt32LittleEndian(bytes);
        Assert.Equal(0, (length + 4) % 8);
        using var head = JsonDocument.Parse(bytes.AsMemory(4, length));
        return (head.RootElement.Clone(), bytes[(4 + length)..]);
    }
}
