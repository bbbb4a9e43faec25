using System.Diagnostics;
using System.IO.Compression;
using System.Text;
using Gaugeyard.Exchange.Tests.Spreadsheets;
using Gaugeyard.Exchange.Tests.Text;
using Xunit;

namespace Gaugeyard.Exchange.Tests;

/// <summary>Mutated files are read or refused with a sentence; nothing else leaves the reader, and nothing takes long.</summary>
public class FuzzTests
{
    private static readonly ReadLimits Small = new() { InflatedWorkbookBytes = 16 << 20, UnpackedBytes = 16 << 20, SharedTextBytes = 8 << 20, Records = 2_000_000 };

    private const string Csv = "Season 4;;;;\r\nrun;vehicle;start;city [L/100 km];remarks\r\nR1;V1;03.04.2031 08:10;8,31;\"hail; then sun\"\r\nR2;V1;04.04.2031;9999;\r\nR3;V2;05.04.2031;<0,1;\"two\r\nlines\"\r\nR4;V2;06.04.2031;7,4*;-\r\nTotal;;;23,4;\r\n";

    private static readonly string[] Splinters = ["\"", "\"\"", ";", ",", "\n", "\r", "\r\n", "\0", "\uFEFF", "\t", "9999", "1e999", "-", "=1+1", "é", "'", "sep=,\n", "2031-02-30", "NaN", "<", "*", "\u2212", " ", "[", "]", "mpg"];

    [Fact]
    public void MutatedText()
    {
        var random = new Random(4711);
        for (int i = 0; i < 400; i++)
        {
            byte[] bytes = Encoding.UTF8.GetBytes(Csv);
            for (int k = random.Next(1, 6); k > 0; k--)
                bytes = Mutate(bytes, random, textual: random.Next(3) > 0);
            Survive(bytes, i % 5 == 0 ? "x.xlsx" : "x.csv", $"text {i}");
        }
    }

    [Fact]
    public void MutatedWorkbooks()
    {
        var random = new Random(1147);
        string rows = Sheet.Rows(["run", "vehicle", "start", "city", "wet"], ["R1", "V1", new DateTime(2031, 4, 3), 8.31, true], ["R2", "V1", new DateTime(2031, 4, 4), "9,1*", false], ["R3", "V2", "#N/A", 9999, null]);
        var parts = new ZipArchive(new MemoryStream(Sheet.Book(false, "<mergeCells count=\"1\"><mergeCell ref=\"A1:B1\"/></mergeCells>", ("Runs", rows)))).Entries.Select(e =>
        {
            using var memory = new MemoryStream();
            using var part = e.Open();
            part.CopyTo(memory);
            return (e.FullName, Bytes: memory.ToArray());
        }).ToArray();
        for (int i = 0; i < 250; i++)
        {
            byte[] bytes;
            if (i % 3 == 0)
            {
                // the archive itself
                bytes = BadInputTests.Zip(parts);
                for (int k = random.Next(1, 4); k > 0; k--)
                    bytes = Mutate(bytes, random, textual: false);
            }
            else
            {
                // the XML inside
                var changed = parts.ToArray();
                int at = random.Next(3) == 0 ? random.Next(changed.Length) : changed.Length - 1;
                for (int k = random.Next(1, 5); k > 0; k--)
                    changed[at] = (changed[at].FullName, random.Next(2) == 0 ? Mutate(changed[at].Bytes, random, textual: true) : Number(changed[at].Bytes, random));
                bytes = BadInputTests.Zip(changed);
            }
            Survive(bytes, "x.xlsx", $"workbook {i}");
        }
    }

    private static void Survive(byte[] bytes, string name, string what)
    {
        var watch = Stopwatch.StartNew();
        try
        {
            var table = Scratch.Read(bytes, name: name, limits: Small);
            Assert.All(table.Columns, c => Assert.Equal(table.Records, c.Count));
            Assert.Equal(table.Columns.Count, table.Columns.Select(c => c.Name).Distinct().Count());
            Assert.All(table.Findings, f => Assert.True(f.Record is null || f.Record >= 1 && f.Record <= table.Records, what + ": " + f));
        }
        catch (UnreadableFileException e)
        {
            Assert.True(e.Message.Length > 20, what);
        }
        catch (Exception e) when (e is not Xunit.Sdk.IAssertionException)
        {
            Assert.Fail($"{what}: {e}");
        }
        Assert.True(watch.Elapsed < TimeSpan.FromSeconds(60), $"{what} took {watch.Elapsed}");
    }

    private static byte[] Mutate(byte[] bytes, Random random, bool textual)
    {
        if (bytes.Length == 0)
            return bytes;
        int at = random.Next(bytes.Length);
        switch (random.Next(5))
        {
            case 0:
                return [.. bytes[..at], .. textual ? Encoding.UTF8.GetBytes(Splinters[random.Next(Splinters.Length)]) : [(byte)random.Next(256)], .. bytes[at..]];
            case 1:
                return [.. bytes[..at], .. bytes[Math.Min(bytes.Length, at + random.Next(1, 20))..]];
            case 2:
                byte[] changed = [.. bytes];
                changed[at] = textual ? (byte)random.Next(32, 127) : (byte)random.Next(256);
                return changed;
            case 3:
                int length = Math.Min(bytes.Length - at, random.Next(1, 40));
                return [.. bytes[..at], .. bytes.AsSpan(at, length), .. bytes[at..]];
            default:
                return random.Next(4) == 0 ? bytes[..at] : bytes;
        }
    }

    // numbers in attributes and cells grow absurd
    private static byte[] Number(byte[] bytes, Random random)
    {
        string text = Encoding.UTF8.GetString(bytes);
        var digits = Enumerable.Range(0, text.Length).Where(i => char.IsAsciiDigit(text[i])).ToArray();
        if (digits.Length == 0)
            return bytes;
        int at = digits[random.Next(digits.Length)];
        string absurd = new[] { "99999999", "-1", "4294967296", "1e308", "0", "", "ZZZ9" }[random.Next(7)];
        return Encoding.UTF8.GetBytes(text[..at] + absurd + text[(at + 1)..]);
    }
}
