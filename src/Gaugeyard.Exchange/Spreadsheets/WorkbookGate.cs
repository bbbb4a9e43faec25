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
    public sealed record Facts(bool From1904);

    public static Facts Check(Stream stream, string name, ReadLimits limits, CancellationToken cancellationToken)
    {
        using var archive = new ZipArchive(stream, ZipArchiveMode.Read, leaveOpen: true);
        byte[] block = new byte[1 << 16];
        long total = 0;
        bool from1904 = false;
        if (archive.Entries.Count > 10_000)
            throw new UnreadableFileException($"{name} has {archive.Entries.Count:N0} parts, far more than a workbook needs. Save a copy with only the sheet of runs.");
        foreach (var entry in archive.Entries)
        {
            string part = entry.FullName.Replace('\\', '/').ToLowerInvariant();
            if (!part.EndsWith(".xml", StringComparison.Ordinal) && !part.EndsWith(".rels", StringComparison.Ordinal))
                continue;
            bool shared = part.EndsWith("sharedstrings.xml", StringComparison.Ordinal);
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
        return new Facts(from1904);
    }
}
