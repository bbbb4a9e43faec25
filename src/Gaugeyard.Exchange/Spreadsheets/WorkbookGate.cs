using System.IO.Compression;
using System.Text;
using Gaugeyard.Exchange.Text;

namespace Gaugeyard.Exchange.Spreadsheets;

/// <summary>
/// Lets a workbook through only when what its parts really inflate to stays within the limits. The sizes that the archive
/// itself states are not believed: every part that is read is inflated once into nothing, counted while it goes.
/// </summary>
internal static class WorkbookGate
{
    /// <summary>What the workbook says about itself.</summary>
    /// <param name="From1904">Whether its serial days count from 1904.</param>
    /// <param name="LastRow">Last row with a value in any sheet, from 1.</param>
    /// <param name="LastColumn">Last column with a value in any sheet, from 0.</param>
    /// <param name="BareFormulas">Formulas without a stored result.</param>
    /// <param name="Bytes">What the parts that are read inflate to.</param>
    public sealed record Facts(bool From1904, int LastRow, int LastColumn, int BareFormulas, long Bytes);

    public static Facts Check(Stream stream, string name, ReadLimits limits, CancellationToken cancellationToken)
    {
        using var archive = new ZipArchive(stream, ZipArchiveMode.Read, leaveOpen: true);
        byte[] block = new byte[1 << 16];
        long total = 0;
        bool from1904 = false;
        var used = new UsedCells();
        if (archive.Entries.Count > 10_000)
            throw new UnreadableFileException($"{name} has {archive.Entries.Count:N0} parts, far more than a workbook needs. Save a copy with only the sheet of runs.");
        foreach (var entry in archive.Entries)
        {
            string part = entry.FullName.Replace('\\', '/').ToLowerInvariant();
            if (!part.EndsWith(".xml", StringComparison.Ordinal) && !part.EndsWith(".rels", StringComparison.Ordinal))
                continue;
            bool shared = part.EndsWith("sharedstrings.xml", StringComparison.Ordinal);
            bool sheet = part.Contains("worksheets/", StringComparison.Ordinal);
            bool workbook = part == "xl/workbook.xml";
            using var inflating = entry.Open();
            long size = 0;
            var begin = new MemoryStream();
            while (inflating.Read(block) is > 0 and var read)
            {
                cancellationToken.ThrowIfCancellationRequested();
                size += read;
                total += read;
                if (total > limits.InflatedWorkbookBytes || shared && size > limits.SharedTextBytes)
                    throw new UnreadableFileException($"{name} inflates to more than {Sizes.Say(shared && size > limits.SharedTextBytes ? limits.SharedTextBytes : limits.InflatedWorkbookBytes)}, the limit for {(shared && size > limits.SharedTextBytes ? "the texts of " : "")}one workbook. Split it, or save the sheet as CSV.");
                if (sheet)
                    used.Look(block.AsSpan(0, read));
                if (workbook && begin.Length < 1 << 20)
                    begin.Write(block, 0, read);
            }
            if (workbook)
            {
                string xml = Encoding.UTF8.GetString(begin.GetBuffer(), 0, (int)begin.Length);
                from1904 = xml.Contains("date1904=\"1\"", StringComparison.Ordinal) || xml.Contains("date1904=\"true\"", StringComparison.Ordinal);
            }
        }
        stream.Position = 0;
        return new Facts(from1904, used.LastRow, used.LastColumn, used.BareFormulas, total);
    }

    /// <summary>
    /// Follows the tags of a sheet to the last cell that holds a value. Sheets often have formats or rules down to the last row
    /// and column; walking there cell by cell would take minutes.
    /// </summary>
    private sealed class UsedCells
    {
        private readonly byte[] _tag = new byte[200];
        private int _length = -1;
        private int _row;
        private int _column;
        private int _rowOfRow;

        private bool _formula;

        public int LastRow { get; private set; }

        public int BareFormulas { get; private set; }

        public int LastColumn { get; private set; } = -1;

        public void Look(ReadOnlySpan<byte> bytes)
        {
            while (true)
            {
                if (_length < 0)
                {
                    int open = bytes.IndexOf((byte)'<');
                    if (open < 0)
                        return;
                    bytes = bytes[(open + 1)..];
                    _length = 0;
                }
                int close = bytes.IndexOf((byte)'>');
                var part = close < 0 ? bytes : bytes[..close];
                int room = Math.Min(part.Length, _tag.Length - _length);
                part[..room].CopyTo(_tag.AsSpan(_length));
                _length += room;
                if (close < 0)
                    return;
                Tag(_tag.AsSpan(0, _length));
                _length = -1;
                bytes = bytes[(close + 1)..];
            }
        }

        private void Tag(ReadOnlySpan<byte> tag)
        {
            int end = tag.IndexOfAny((byte)' ', (byte)'/');
            var name = end < 0 ? tag : tag[..end];
            int colon = name.IndexOf((byte)':');
            name = name[(colon + 1)..];
            if (name.SequenceEqual("row"u8))
            {
                _rowOfRow = Reference(tag) is { Length: > 0 } at && System.Buffers.Text.Utf8Parser.TryParse(at, out int row, out _) ? row : _rowOfRow + 1;
                _column = -1;
            }
            else if (name.SequenceEqual("c"u8))
            {
                var at = Reference(tag);
                int i = 0, column = 0;
                while (i < at.Length && i < 4 && at[i] is >= (byte)'A' and <= (byte)'Z')
                    column = column * 26 + (at[i++] - 'A' + 1);
                _formula = false;
                _column = i > 0 ? column - 1 : _column + 1;
                _row = i > 0 && System.Buffers.Text.Utf8Parser.TryParse(at[i..], out int row, out _) ? row : _rowOfRow;
            }
            else if (name.SequenceEqual("v"u8) || name.SequenceEqual("is"u8) || name.SequenceEqual("f"u8))
            {
                LastRow = Math.Max(LastRow, _row);
                LastColumn = Math.Max(LastColumn, _column);
                _formula = name[0] == (byte)'f';
            }
            else if (_formula && tag.Length > 1 && tag[0] == (byte)'/' && tag[^1] == (byte)'c' && (tag.Length == 2 || tag[^2] == (byte)':'))
            {
                BareFormulas++;
                _formula = false;
            }
        }

        private static ReadOnlySpan<byte> Reference(ReadOnlySpan<byte> tag)
        {
            int at = tag.IndexOf(" r=\""u8);
            if (at < 0)
                return default;
            var rest = tag[(at + 4)..];
            int quote = rest.IndexOf((byte)'"');
            return quote < 0 ? rest : rest[..quote];
        }
    }
}
