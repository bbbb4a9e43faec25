using System.IO.Compression;
using System.Text;
using Xunit;

namespace Gaugeyard.DemoSeason.Tests;

/// <summary>The files in the repository are what the generator makes.</summary>
public class CommittedFilesTests
{
    private static readonly string Root = FindRoot();

    [Fact]
    public void Text_files_are_regenerated_to_the_byte()
    {
        foreach (var (name, bytes) in DemoFiles.ForUsers.Where(f => f.Name.EndsWith(".csv", StringComparison.Ordinal)))
            Assert.True(bytes.AsSpan().SequenceEqual(File.ReadAllBytes(Path.Combine(Root, "demo-data", name))), $"demo-data/{name} differs from what the generator makes; run dotnet run --project tests/Gaugeyard.DemoSeason -- demo-data");
        foreach (var (name, bytes) in DemoFiles.ForTests)
            Assert.True(bytes.AsSpan().SequenceEqual(File.ReadAllBytes(Path.Combine(Root, "tests", "Gaugeyard.Browser.Tests", "Truth", name))), $"Truth/{name} differs from what the generator makes");
    }

    // the compressor may change between runtimes, the parts may not
    [Fact]
    public void The_workbook_is_regenerated_part_by_part()
    {
        byte[] made = DemoFiles.ForUsers.Single(f => f.Name.EndsWith(".xlsx", StringComparison.Ordinal)).Bytes;
        Assert.Equal(Parts(made), Parts(File.ReadAllBytes(Path.Combine(Root, "demo-data", "ottermoor-season-4.xlsx"))));
    }

    private static Dictionary<string, string> Parts(byte[] workbook)
    {
        using var zip = new ZipArchive(new MemoryStream(workbook));
        return zip.Entries.ToDictionary(e => e.FullName, e =>
        {
            using var reader = new StreamReader(e.Open(), Encoding.UTF8);
            return reader.ReadToEnd();
        });
    }

    private static string FindRoot()
    {
        string? folder = AppContext.BaseDirectory;
        while (folder is not null && !File.Exists(Path.Combine(folder, "Gaugeyard.slnx")))
            folder = Path.GetDirectoryName(folder);
        return folder ?? throw new InvalidOperationException("The tests run outside the repository: no Gaugeyard.slnx above " + AppContext.BaseDirectory);
    }
}
