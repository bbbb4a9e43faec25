using System.IO.Compression;
using System.Text;

namespace Gaugeyard.Exchange.Text;

/// <summary>What a file is by its first bytes.</summary>
internal enum FileSort
{
    Text,
    Workbook,
}

/// <summary>
/// A file on its way in: recognised by content, unpacked when it is compressed (bounded while inflating), and opened as often
/// as needed. Disposing it deletes what was unpacked.
/// </summary>
internal sealed class ArrivingFile : IDisposable
{
    private readonly string _path;
    private readonly string? _unpacked;

    private ArrivingFile(string path, string? unpacked, FileSort sort, string wrapping, string name)
    {
        _path = path;
        _unpacked = unpacked;
        Sort = sort;
        Wrapping = wrapping;
        Name = name;
    }

    public FileSort Sort { get; }

    /// <summary>" inside a .gz", " inside a .zip" or "".</summary>
    public string Wrapping { get; }

    /// <summary>What the user calls it, made fit for a sentence.</summary>
    public string Name { get; }

    /// <summary>Bytes to read.</summary>
    public long Length => new FileInfo(_unpacked ?? _path).Length;

    public FileStream Open() => new(_unpacked ?? _path, FileMode.Open, FileAccess.Read, FileShare.Read, 1 << 16, FileOptions.SequentialScan);

    public void Dispose()
    {
        if (_unpacked is not null)
            File.Delete(_unpacked);
    }

    public static ArrivingFile Recognise(string path, string fileName, ReadLimits limits, CancellationToken cancellationToken)
    {
        string name = Detection.Blanks.OneLine(new string([.. fileName.Select(c => char.IsControl(c) ? ' ' : c)]), 80);
        var (sort, packing) = Look(path, name);
        if (packing is null)
            return new ArrivingFile(path, null, sort, "", name);
        string unpacked = Path.Combine(Path.GetTempPath(), "gaugeyard-" + Path.GetRandomFileName());
        try
        {
            Unpack(path, unpacked, packing, name, limits, cancellationToken);
            var (inner, again) = Look(unpacked, name);
            if (again is not null)
                throw new UnreadableFileException($"{name} holds a compressed file inside a compressed file; unpack it once and upload what is inside.");
            return new ArrivingFile(path, unpacked, inner, $" inside a .{packing}", name);
        }
        catch
        {
            File.Delete(unpacked);
            throw;
        }
    }

    private static (FileSort Sort, string? Packing) Look(string path, string name)
    {
        Span<byte> head = stackalloc byte[8];
        int n;
        using (var stream = File.OpenRead(path))
        {
            n = stream.ReadAtLeast(head, head.Length, throwOnEndOfStream: false);
            if (n == 0)
                throw new UnreadableFileException($"{name} is empty: it has no bytes. Export it again and upload the new file.");
        }
        head = head[..n];
        if (head.StartsWith((ReadOnlySpan<byte>)[0x1F, 0x8B]))
            return (FileSort.Text, "gz");
        if (head.StartsWith((ReadOnlySpan<byte>)[0xD0, 0xCF, 0x11, 0xE0]))
            throw new UnreadableFileException(IsEncrypted(path)
                ? $"{name} is protected by a password, so its contents cannot be read. Save a copy without the password and upload that."
                : $"{name} is an old binary document (.xls or similar), which is not read. Save it as .xlsx or CSV and upload that.");
        foreach (var (magic, what) in Foreign)
            if (head.StartsWith(magic))
                throw new UnreadableFileException($"{name} is {what}, not a table. Export the table as CSV or .xlsx and upload that.");
        return head.StartsWith("PK\u0003\u0004"u8) || head.StartsWith("PK\u0005\u0006"u8) ? LookIntoZip(path, name) : (FileSort.Text, null);
    }

    private static readonly (byte[] Magic, string What)[] Foreign =
    [
        ("%PDF"u8.ToArray(), "a PDF document"),
        ([0x89, (byte)'P', (byte)'N', (byte)'G'], "a picture"),
        ([0xFF, 0xD8, 0xFF], "a picture"),
        ("GIF8"u8.ToArray(), "a picture"),
        ("Rar!"u8.ToArray(), "a RAR archive"),
        ([(byte)'7', (byte)'z', 0xBC, 0xAF], "a 7z archive"),
        ("SQLite f"u8.ToArray(), "a database"),
        ("PAR1"u8.ToArray(), "a Parquet file"),
        ([0x7F, (byte)'E', (byte)'L', (byte)'F'], "a program"),
        ([0x28, 0xB5, 0x2F, 0xFD], "a Zstandard archive"),
    ];

    private static (FileSort, string?) LookIntoZip(string path, string name)
    {
        try
        {
            using var archive = ZipFile.OpenRead(path);
            var entries = archive.Entries.Where(e => e.Name.Length > 0 && !e.FullName.StartsWith("__MACOSX/", StringComparison.Ordinal)).ToList();
            if (entries.Any(e => e.FullName.Replace('\\', '/').Equals("xl/workbook.xml", StringComparison.OrdinalIgnoreCase)))
                return (FileSort.Workbook, null);
            if (entries.Any(e => e.FullName.Equals("xl/workbook.bin", StringComparison.OrdinalIgnoreCase)))
                throw new UnreadableFileException($"{name} is a binary workbook (.xlsb), which is not read. Save it as .xlsx and upload that.");
            if (entries.Any(e => e.FullName is "mimetype" or "content.xml" or "[Content_Types].xml"))
                throw new UnreadableFileException($"{name} is a document, but not an .xlsx workbook. Save the table as .xlsx or CSV and upload that.");
            if (entries.Count == 1)
                return (FileSort.Text, "zip");
            throw new UnreadableFileException(entries.Count == 0
                ? $"{name} is an archive without any file. Put the table into it or upload the table itself."
                : $"{name} is an archive of {entries.Count} files; upload the one file that holds the table, or an archive with only that.");
        }
        catch (Exception e) when (e is InvalidDataException or IOException or NotSupportedException or ArgumentException or OverflowException)
        {
            throw new UnreadableFileException($"{name} is cut off or damaged: its list of contents cannot be read. Copy or export it again and upload the new file.", e);
        }
    }

    // the inflater takes a cut stream for an ended one; the last four bytes say how much there should be (block-wise archives have an extra field and are left alone)
    private static bool GzipIsWhole(string path, long total)
    {
        using var stream = File.OpenRead(path);
        Span<byte> head = stackalloc byte[4], tail = stackalloc byte[4];
        if (stream.Length < 18)
            return false;
        stream.ReadExactly(head);
        if ((head[3] & 4) != 0)
            return true;
        stream.Seek(-4, SeekOrigin.End);
        stream.ReadExactly(tail);
        return System.Buffers.Binary.BinaryPrimitives.ReadUInt32LittleEndian(tail) == unchecked((uint)total);
    }

    private static bool IsEncrypted(string path)
    {
        // the directory of an encrypted workbook names a stream "EncryptedPackage"; it stands early or late, so all is searched in blocks
        byte[] wanted = Encoding.Unicode.GetBytes("EncryptedPackage");
        using var stream = File.OpenRead(path);
        byte[] block = new byte[1 << 16];
        int kept = 0;
        while (stream.Read(block, kept, block.Length - kept) is > 0 and var read)
        {
            int n = kept + read;
            if (block.AsSpan(0, n).IndexOf(wanted) >= 0)
                return true;
            kept = Math.Min(n, wanted.Length - 1);
            block.AsSpan(n - kept, kept).CopyTo(block);
        }
        return false;
    }

    private static void Unpack(string from, string to, string packing, string name, ReadLimits limits, CancellationToken cancellationToken)
    {
        try
        {
            using var file = File.OpenRead(from);
            using var archive = packing == "zip" ? new ZipArchive(file, ZipArchiveMode.Read) : null;
            using var inflating = archive is null
                ? new GZipStream(file, CompressionMode.Decompress)
                : archive.Entries.Single(e => e.Name.Length > 0 && !e.FullName.StartsWith("__MACOSX/", StringComparison.Ordinal)).Open();
            using var target = new FileStream(to, FileMode.CreateNew, FileAccess.Write);
            byte[] block = new byte[1 << 17];
            long total = 0;
            while (inflating.Read(block) is > 0 and var read)
            {
                cancellationToken.ThrowIfCancellationRequested();
                total += read;
                if (total > limits.UnpackedBytes)
                    throw new UnreadableFileException($"{name} inflates to more than {Sizes.Say(limits.UnpackedBytes)}, the limit for one file. Split it and upload the parts.");
                target.Write(block, 0, read);
            }
            if (archive is null && !GzipIsWhole(from, total))
                throw new InvalidDataException("cut off");
        }
        catch (Exception e) when (e is InvalidDataException or NotSupportedException or EndOfStreamException)
        {
            throw new UnreadableFileException($"{name} is cut off or damaged: its compressed contents cannot be read. Copy or export it again and upload the new file.", e);
        }
    }
}

/// <summary>Sizes in sentences.</summary>
internal static class Sizes
{
    public static string Say(long bytes) => bytes switch
    {
        >= 1L << 30 => $"{bytes / (double)(1L << 30):0.#} GB",
        >= 1L << 20 => $"{bytes / (double)(1L << 20):0.#} MB",
        _ => $"{Math.Max(1, bytes >> 10)} KB",
    };
}
