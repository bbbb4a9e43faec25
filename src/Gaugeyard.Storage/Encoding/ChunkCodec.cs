using System.Buffers.Binary;
using System.Runtime.InteropServices;
using System.Text;
using Gaugeyard.Records.Columns;

namespace Gaugeyard.Storage.Encoding;

/// <summary>
/// Turns up to 65,536 values of a column into bytes and back, bit for bit. The bytes depend on the values alone, so that equal
/// chunks have equal hashes. Layout: one byte of form, then what the form needs; all numbers little-endian.
/// </summary>
internal static class ChunkCodec
{
    /// <summary>Values per chunk; the last one of a column may be shorter.</summary>
    public const int Size = 65_536;

    private const byte RawDoubles = 1, ScaledDoubles = 2, Codes = 3, Dates = 4;
    private static readonly double[] PowersOfTen = [1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6];
    private static readonly long[] DateSteps = [TimeSpan.TicksPerDay, TimeSpan.TicksPerMinute, TimeSpan.TicksPerSecond, TimeSpan.TicksPerMillisecond, 1];

    /// <summary>Encodes rows [start, start + count) of a column.</summary>
    public static byte[] Encode(Column column, int start, int count) => column switch
    {
        NumberColumn c => EncodeNumbers(c.Values.AsSpan(start, count)),
        CodedColumn c => EncodeCodes(c, start, count),
        DateTimeColumn c => EncodeDates(c.Ticks.AsSpan(start, count)),
        _ => throw new ArgumentException($"no encoding for {column.GetType().Name}", nameof(column)),
    };

    /// <summary>Number of values in an encoded chunk.</summary>
    public static int CountOf(ReadOnlySpan<byte> bytes) => BinaryPrimitives.ReadInt32LittleEndian(bytes[1..]);

    private static byte[] EncodeNumbers(ReadOnlySpan<double> values)
    {
        var scaled = new long[values.Length];
        for (int digits = 0; digits < PowersOfTen.Length; digits++)
        {
            if (!TryScale(values, digits, scaled, out var patches))
                continue;
            var writer = Writer(ScaledDoubles, values.Length);
            writer.Write((byte)digits);
            WriteIntegers(writer, scaled);
            writer.Write(patches.Count);
            foreach (var (at, value) in patches)
            {
                writer.Write((ushort)at);
                writer.Write(value);
            }
            return Bytes(writer);
        }
        var raw = Writer(RawDoubles, values.Length);
        raw.Write(MemoryMarshal.AsBytes(values));
        return Bytes(raw);
    }

    // value = k / 10^d bit for bit for all but 1 in 64 values, which are kept beside as they are
    private static bool TryScale(ReadOnlySpan<double> values, int digits, long[] scaled, out List<(int At, double Value)> patches)
    {
        patches = [];
        double power = PowersOfTen[digits];
        int allowed = values.Length / 64;
        for (int i = 0; i < values.Length; i++)
        {
            double v = values[i];
            if (double.IsNaN(v))
            {
                scaled[i] = long.MinValue;
                continue;
            }
            double k = Math.Round(v * power);
            if (Math.Abs(k) < 9e15 && BitConverter.DoubleToInt64Bits(k / power) == BitConverter.DoubleToInt64Bits(v))
            {
                scaled[i] = (long)k;
                continue;
            }
            if (patches.Count == allowed)
                return false;
            patches.Add((i, v));
            scaled[i] = long.MinValue;
        }
        return true;
    }

    private static byte[] EncodeCodes(CodedColumn column, int start, int count)
    {
        var local = new List<string>();
        var place = new Dictionary<int, int>();
        var codes = new long[count];
        for (int i = 0; i < count; i++)
        {
            int code = column.Codes[start + i];
            if (code < 0)
            {
                codes[i] = long.MinValue;
                continue;
            }
            if (!place.TryGetValue(code, out int at))
            {
                place.Add(code, at = local.Count);
                local.Add(column.Levels[code]);
            }
            codes[i] = at;
        }
        var writer = Writer(Codes, count);
        writer.Write(local.Count);
        foreach (string level in local)
        {
            byte[] text = System.Text.Encoding.UTF8.GetBytes(level);
            writer.Write(text.Length);
            writer.Write(text);
        }
        WriteIntegers(writer, codes);
        return Bytes(writer);
    }

    private static byte[] EncodeDates(ReadOnlySpan<long> ticks)
    {
        long step = DateSteps[0];
        foreach (long t in ticks)
            while (t != DateTimeColumn.Missing && t % step != 0)
                step = DateSteps[Array.IndexOf(DateSteps, step) + 1];
        var scaled = new long[ticks.Length];
        for (int i = 0; i < scaled.Length; i++)
            scaled[i] = ticks[i] == DateTimeColumn.Missing ? long.MinValue : ticks[i] / step;
        var writer = Writer(Dates, ticks.Length);
        writer.Write(step);
        WriteIntegers(writer, scaled);
        return Bytes(writer);
    }

    // smallest width that holds value - min with all ones left for missing
    private static void WriteIntegers(BinaryWriter writer, ReadOnlySpan<long> values)
    {
        long min = long.MaxValue, max = long.MinValue;
        foreach (long v in values)
        {
            if (v == long.MinValue)
                continue;
            min = Math.Min(min, v);
            max = Math.Max(max, v);
        }
        ulong range = max < min ? 0 : (ulong)max - (ulong)min;
        int width = range < byte.MaxValue ? 1 : range < ushort.MaxValue ? 2 : range < uint.MaxValue ? 4 : 8;
        writer.Write(max < min ? 0 : min);
        writer.Write((byte)width);
        var bytes = new byte[values.Length * width];
        for (int i = 0; i < values.Length; i++)
        {
            ulong u = values[i] == long.MinValue ? ulong.MaxValue : (ulong)values[i] - (ulong)min;
            switch (width)
            {
                case 1: bytes[i] = (byte)u; break;
                case 2: BinaryPrimitives.WriteUInt16LittleEndian(bytes.AsSpan(2 * i), (ushort)u); break;
                case 4: BinaryPrimitives.WriteUInt32LittleEndian(bytes.AsSpan(4 * i), (uint)u); break;
                default: BinaryPrimitives.WriteUInt64LittleEndian(bytes.AsSpan(8 * i), u); break;
            }
        }
        writer.Write(bytes);
    }

    /// <summary>Decodes number chunk bytes into the target.</summary>
    public static void DecodeNumbers(ReadOnlySpan<byte> bytes, Span<double> target)
    {
        int count = CountOf(bytes);
        if (bytes[0] == RawDoubles)
        {
            MemoryMarshal.Cast<byte, double>(bytes.Slice(5, 8 * count)).CopyTo(target);
            return;
        }
        Expect(bytes, ScaledDoubles);
        double power = PowersOfTen[bytes[5]];
        int at = 6;
        var integers = new IntegerReader(bytes, ref at, count);
        for (int i = 0; i < count; i++)
            target[i] = integers.TryGet(i, out long k) ? k / power : double.NaN;
        int patches = BinaryPrimitives.ReadInt32LittleEndian(bytes[at..]);
        at += 4;
        for (int p = 0; p < patches; p++, at += 10)
            target[BinaryPrimitives.ReadUInt16LittleEndian(bytes[at..])] = BinaryPrimitives.ReadDoubleLittleEndian(bytes[(at + 2)..]);
    }

    /// <summary>Decodes code chunk bytes; the chunk's levels are merged into the column's.</summary>
    public static void DecodeCodes(ReadOnlySpan<byte> bytes, Span<int> target, List<string> levels, Dictionary<string, int> index)
    {
        Expect(bytes, Codes);
        int count = CountOf(bytes), local = BinaryPrimitives.ReadInt32LittleEndian(bytes[5..]), at = 9;
        var global = new int[local];
        for (int k = 0; k < local; k++)
        {
            int length = BinaryPrimitives.ReadInt32LittleEndian(bytes[at..]);
            string text = System.Text.Encoding.UTF8.GetString(bytes.Slice(at + 4, length));
            at += 4 + length;
            if (!index.TryGetValue(text, out global[k]))
            {
                index.Add(text, global[k] = levels.Count);
                levels.Add(text);
            }
        }
        var integers = new IntegerReader(bytes, ref at, count);
        for (int i = 0; i < count; i++)
            target[i] = integers.TryGet(i, out long k) ? global[(int)k] : -1;
    }

    /// <summary>Decodes date chunk bytes into the target.</summary>
    public static void DecodeDates(ReadOnlySpan<byte> bytes, Span<long> target)
    {
        Expect(bytes, Dates);
        int count = CountOf(bytes), at = 13;
        long step = BinaryPrimitives.ReadInt64LittleEndian(bytes[5..]);
        var integers = new IntegerReader(bytes, ref at, count);
        for (int i = 0; i < count; i++)
            target[i] = integers.TryGet(i, out long k) ? k * step : DateTimeColumn.Missing;
    }

    private static void Expect(ReadOnlySpan<byte> bytes, byte form)
    {
        if (bytes[0] != form)
            throw new InvalidDataException($"a chunk has form {bytes[0]} where {form} was expected; the store is damaged");
    }

    private static BinaryWriter Writer(byte form, int count)
    {
        var writer = new BinaryWriter(new MemoryStream(), new UTF8Encoding(false));
        writer.Write(form);
        writer.Write(count);
        return writer;
    }

    private static byte[] Bytes(BinaryWriter writer)
    {
        writer.Flush();
        return ((MemoryStream)writer.BaseStream).ToArray();
    }

    private readonly ref struct IntegerReader
    {
        private readonly ReadOnlySpan<byte> _bytes;
        private readonly long _min;
        private readonly int _width;

        public IntegerReader(ReadOnlySpan<byte> bytes, ref int at, int count)
        {
            _min = BinaryPrimitives.ReadInt64LittleEndian(bytes[at..]);
            _width = bytes[at + 8];
            _bytes = bytes.Slice(at + 9, count * _width);
            at += 9 + count * _width;
        }

        public bool TryGet(int i, out long value)
        {
            ulong u;
            bool missing;
            switch (_width)
            {
                case 1: u = _bytes[i]; missing = u == byte.MaxValue; break;
                case 2: u = BinaryPrimitives.ReadUInt16LittleEndian(_bytes[(2 * i)..]); missing = u == ushort.MaxValue; break;
                case 4: u = BinaryPrimitives.ReadUInt32LittleEndian(_bytes[(4 * i)..]); missing = u == uint.MaxValue; break;
                default: u = BinaryPrimitives.ReadUInt64LittleEndian(_bytes[(8 * i)..]); missing = u == ulong.MaxValue; break;
            }
            value = _min + (long)u;
            return !missing;
        }
    }
}
