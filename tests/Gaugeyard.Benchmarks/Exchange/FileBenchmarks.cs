using BenchmarkDotNet.Attributes;
using Gaugeyard.Exchange;
using Gaugeyard.Exchange.Handover;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Benchmarks.Exchange;

/// <summary>Reading a million records of delimited text; writing and reading a workbook of 100,000 records.</summary>
[MemoryDiagnoser]
public class FileBenchmarks
{
    private string _folder = "";
    private HandoverContent _content = null!;

    [GlobalSetup]
    public void Setup()
    {
        _folder = Directory.CreateTempSubdirectory("gaugeyard-benchmark-").FullName;
        FleetFile.Write(Path.Combine(_folder, "fleet.csv"), 1_000_000);
        FleetFile.Write(Path.Combine(_folder, "part.csv"), 100_000);
        var part = TableReader.Read(Path.Combine(_folder, "part.csv"), "part.csv");
        var columns = part.Columns.Take(15).ToList();
        var info = new RunSetInfo("set", "Fleet", "", 1, DateTimeOffset.UnixEpoch, part.Records, null, 0, [], [], 1, false, part.Records);
        _content = new HandoverContent(info, RevisionContent.InMemory(columns), []);
        WriteWorkbook();
    }

    [GlobalCleanup]
    public void Cleanup() => Directory.Delete(_folder, recursive: true);

    [Benchmark]
    public int ReadText() => TableReader.Read(Path.Combine(_folder, "fleet.csv"), "fleet.csv").Records;

    [Benchmark]
    public long InspectText() => TableReader.Inspect(Path.Combine(_folder, "fleet.csv"), "fleet.csv").Records;

    [Benchmark]
    public void WriteWorkbook()
    {
        using var file = File.Create(Path.Combine(_folder, "part.xlsx"));
        HandoverWorkbook.Write(file, _content);
    }

    [Benchmark]
    public int ReadWorkbook() => TableReader.Read(Path.Combine(_folder, "part.xlsx"), "part.xlsx").Records;

    [Benchmark]
    public void WriteText()
    {
        using var file = File.Create(Path.Combine(_folder, "out.csv"));
        HandoverCsv.Write(file, _content);
    }
}
