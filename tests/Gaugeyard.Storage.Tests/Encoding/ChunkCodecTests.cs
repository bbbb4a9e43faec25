using CsCheck;
using Gaugeyard.Records.Columns;
using Gaugeyard.Storage.Encoding;
using Xunit;

namespace Gaugeyard.Storage.Tests.Encoding;

public sealed class ChunkCodecTests
{
    private static readonly Gen<double> Number = Gen.Frequency(
        (6, Gen.Int[-100_000, 100_000].Select(k => k / 100.0)),
        (2, Gen.Double),
        (1, Gen.Const(double.NaN)),
        (1, Gen.OneOf<double>(new[] { 0.0, -0.0, double.Epsilon, double.MaxValue, double.MinValue, 9007199254740993.0, 1e300 }.Select(v => Gen.Const(v)).ToArray())));

    [Fact]
    public void Numbers_come_back_bit_for_bit() => Number.Array[0, 500].Sample(values =>
    {
        // infinities are never stored
        for (int i = 0; i < values.Length; i++)
            if (double.IsInfinity(values[i]))
                values[i] = 1;
        var column = new NumberColumn(new ColumnDefinition("x", ColumnKind.Number), values);
        var back = new double[values.Length];
        ChunkCodec.DecodeNumbers(ChunkCodec.Encode(column, 0, values.Length), back);
        for (int i = 0; i < values.Length; i++)
            Assert.True(double.IsNaN(values[i]) ? double.IsNaN(back[i]) : BitConverter.DoubleToInt64Bits(values[i]) == BitConverter.DoubleToInt64Bits(back[i]), $"{values[i]:R} came back as {back[i]:R}");
    });

    [Fact]
    public void Texts_come_back_whatever_they_hold() => Gen.String.Null().Array[0, 300].Sample(texts =>
    {
        // lone surrogates are not text and cannot reach a column
        for (int i = 0; i < texts.Length; i++)
            if (texts[i] is { } t)
                texts[i] = new string([.. t.Where(c => !char.IsSurrogate(c))]);
        var column = CodedColumn.FromTexts(new ColumnDefinition("x", ColumnKind.Text), texts);
        var codes = new int[texts.Length];
        var levels = new List<string>();
        ChunkCodec.DecodeCodes(ChunkCodec.Encode(column, 0, texts.Length), codes, levels, new Dictionary<string, int>(StringComparer.Ordinal));
        Assert.Equal(texts, codes.Select(c => c < 0 ? null : levels[c]));
    });

    [Fact]
    public void Dates_come_back_to_the_tick() => Gen.Frequency((3, Gen.Int[700_000, 740_000].Select(d => d * TimeSpan.TicksPerDay)), (1, Gen.Long[0, DateTime.MaxValue.Ticks]), (1, Gen.Const(DateTimeColumn.Missing)))
        .Array[0, 300].Sample(ticks =>
        {
            var back = new long[ticks.Length];
            ChunkCodec.DecodeDates(ChunkCodec.Encode(new DateTimeColumn(new ColumnDefinition("x", ColumnKind.DateTime), ticks), 0, ticks.Length), back);
            Assert.Equal(ticks, back);
        });

    [Fact]
    public void Two_decimals_take_two_bytes_a_value()
    {
        var values = Enumerable.Range(0, 10_000).Select(i => (i % 2000) / 100.0).ToArray();
        var bytes = ChunkCodec.Encode(new NumberColumn(new ColumnDefinition("x", ColumnKind.Number), values), 0, values.Length);
        Assert.InRange(bytes.Length, 20_000, 20_100);
    }
}
