using System.IO.Compression;
using System.Text;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Exchange.Tests.Text;

/// <summary>Files that cannot be taken in get one sentence: what, where, what to do.</summary>
public class BadInputTests
{
    [Fact]
    public void EmptyFile() => Assert.Contains("is empty", Scratch.Refused(""), StringComparison.Ordinal);

    [Theory]
    [InlineData("\n\n  \n")]
    [InlineData("\uFEFF")]
    public void BlankFile(string text) => Assert.Contains("is empty", Scratch.Refused(text), StringComparison.Ordinal);

    [Theory]
    [InlineData("run,vehicle,city\n")]
    [InlineData("run,vehicle,city")]
    [InlineData("Season 4\n\nrun,vehicle,city\n,,L/100 km\n")]
    public void HeaderOnly(string text) => Assert.Contains("no record", Scratch.Refused(text), StringComparison.Ordinal);

    [Fact]
    public void OneRowIsFine()
    {
        var table = Scratch.Read("run,vehicle,city\nR1,V1,8.1\n");
        Assert.Equal(1, table.Records);
        Assert.Equal([8.1], table.Numbers("city"));
    }

    [Fact]
    public void TooManyColumns()
    {
        string text = string.Join(',', Enumerable.Range(0, 5000).Select(i => "c" + i)) + "\n" + string.Join(',', Enumerable.Range(0, 5000)) + "\n";
        Assert.Contains("5,000 columns", Scratch.Refused(text), StringComparison.Ordinal);
        Assert.Contains("row 2", Scratch.Refused("a,b\n1,2,3,4,5\n", limits: new ReadLimits { Columns = 4 }), StringComparison.Ordinal);
    }

    [Fact]
    public void AHugeCell()
    {
        string big = new('x', 10 << 20);
        Assert.Contains("row 2", Scratch.Refused($"run,remarks\nR1,{big}\nR2,short\n"), StringComparison.Ordinal);
        Assert.Contains("line 2", Scratch.Refused($"run,remarks\nR1,\"{big}\"\nR2,short\n"), StringComparison.Ordinal);
    }

    [Fact]
    public void UnbalancedQuotes()
    {
        Assert.Contains("opens in line 3", Scratch.Refused("run,remarks\nR1,fine\nR2,\"never closed\nR3,x\n"), StringComparison.Ordinal);
        Assert.Contains("opens in line 2", Scratch.Refused("run,remarks\nR1,\"never closed\nR2,x\nR3,\"closed\"\n"), StringComparison.Ordinal);
    }

    [Fact]
    public void StrayQuotesAreCharacters()
    {
        var table = Scratch.Read("run,tyre,city\nR1,16\" wheel,8.1\nR2,17\" wheel,8.2\nR3,\"a \"\"b\"\" c\",8.3\nR4,\"ab\"c,8.4\n");
        Assert.Equal(["16\" wheel", "17\" wheel", "a \"b\" c", "abc"], table.Texts("tyre"));
    }

    [Fact]
    public void MixedLineEndsAreRead()
    {
        var table = Scratch.Read("run,city\r\nR1,8.1\nR2,8.2\r\nR3,8.3\rR4,8.4");
        Assert.Equal(["R1", "R2", "R3", "R4"], table.Texts("run"));
        Assert.Contains(table.Findings, f => f.Severity == Severity.Note && f.Text.Contains("line ends", StringComparison.Ordinal));
    }

    [Fact]
    public void NulBytes()
    {
        Assert.Contains("line 2", Scratch.Refused("run,city\nR1,\08.1\n"), StringComparison.Ordinal);
        // far behind the beginning that is looked at first
        string far = "run,city\n" + string.Concat(Enumerable.Repeat("R1,8.1\n", 400_000)) + "R2,8\0\n";
        Assert.Contains("line 400002", Scratch.Refused(far), StringComparison.Ordinal);
    }

    [Fact]
    public void ForeignFiles()
    {
        Assert.Contains("PDF", Scratch.Refused("%PDF-1.7 something"), StringComparison.Ordinal);
        Assert.Contains("picture", Scratch.Refused([0x89, (byte)'P', (byte)'N', (byte)'G', 1, 2, 3, 4, 5]), StringComparison.Ordinal);
        Assert.Contains(".xls", Scratch.Refused([0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1, 0, 0]), StringComparison.Ordinal);
        byte[] locked = [0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1, .. new byte[70_000], .. Encoding.Unicode.GetBytes("EncryptedPackage"), 0, 0];
        Assert.Contains("password", Scratch.Refused(locked, "season.xlsx"), StringComparison.Ordinal);
    }

    [Fact]
    public void WrongExtensionIsAFinding()
    {
        var table = Scratch.Read("run,city\nR1,8.1\n", name: "broken.xlsx");
        Assert.Equal(1, table.Records);
        Assert.Contains(table.Findings, f => f.Severity == Severity.Warning && f.Text.Contains("holds plain text", StringComparison.Ordinal));
    }

    [Fact]
    public void CompressedFiles()
    {
        byte[] plain = Encoding.UTF8.GetBytes("run,city\nR1,8.1\nR2,8.2\n");
        using var gz = new MemoryStream();
        using (var pack = new GZipStream(gz, CompressionLevel.Optimal, leaveOpen: true))
            pack.Write(plain);
        var table = Scratch.Read(gz.ToArray(), name: "runs.csv.gz");
        Assert.Equal([8.1, 8.2], table.Numbers("city"));
        Assert.Contains("inside a .gz", table.Reading.What, StringComparison.Ordinal);
        Assert.Equal([8.1, 8.2], Scratch.Read(Zip(("runs.csv", plain)), name: "runs.zip").Numbers("city"));
        Assert.Contains("2 files", Scratch.Refused(Zip(("a.csv", plain), ("b.csv", plain)), "runs.zip"), StringComparison.Ordinal);
        Assert.Contains("damaged", Scratch.Refused(gz.ToArray()[..20], "runs.gz"), StringComparison.Ordinal);
        Assert.Contains("damaged", Scratch.Refused(Zip(("runs.csv", plain))[..60], "runs.zip"), StringComparison.Ordinal);
    }

    [Fact]
    public void InflationIsBoundedWhileInflating()
    {
        using var gz = new MemoryStream();
        using (var pack = new GZipStream(gz, CompressionLevel.Fastest, leaveOpen: true))
            for (int i = 0; i < 300; i++)
                pack.Write(new byte[1 << 20]);
        Assert.Contains("inflates to more than 64 MB", Scratch.Refused(gz.ToArray(), "bomb.gz", new ReadLimits { UnpackedBytes = 64 << 20 }), StringComparison.Ordinal);
    }

    [Fact]
    public void FileNamesStayInert()
    {
        string message = Assert.Throws<UnreadableFileException>(() => Scratch.Read("", name: "../../etc/passwd\u0000\n<script>.csv")).Message;
        Assert.DoesNotContain('\n', message);
        Assert.DoesNotContain('\0', message);
    }

    [Fact]
    public void AnAbsentFileIsASentence() => Assert.Throws<UnreadableFileException>(() => TableReader.Read(Path.Combine(Path.GetTempPath(), Path.GetRandomFileName()), "gone.csv"));

    [Fact]
    public void CancellationStopsTheReading()
    {
        using var source = new CancellationTokenSource();
        source.Cancel();
        byte[] bytes = Encoding.UTF8.GetBytes("run,city\n" + string.Concat(Enumerable.Repeat("R1,8.1\n", 100_000)));
        Assert.ThrowsAny<OperationCanceledException>(() => Scratch.With(bytes, path => TableReader.Read(path, "runs.csv", null, null, null, source.Token)));
    }

    internal static byte[] Zip(params (string Name, byte[] Bytes)[] files)
    {
        using var memory = new MemoryStream();
        using (var archive = new ZipArchive(memory, ZipArchiveMode.Create, leaveOpen: true))
            foreach (var (name, bytes) in files)
            {
                using var entry = archive.CreateEntry(name).Open();
                entry.Write(bytes);
            }
        return memory.ToArray();
    }
}
