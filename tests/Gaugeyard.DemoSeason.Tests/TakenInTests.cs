using Gaugeyard.Exchange;
using Gaugeyard.Records.Columns;
using Xunit;
using RecordColumn = Gaugeyard.Records.Columns.Column;

namespace Gaugeyard.DemoSeason.Tests;

/// <summary>The reader sees the same season in the clean and in the messy file, with nothing overruled.</summary>
public sealed class TakenInTests : IDisposable
{
    private readonly string _folder = Directory.CreateTempSubdirectory("demo-season").FullName;

    public void Dispose() => Directory.Delete(_folder, recursive: true);

    private ImportedTable Read(string name)
    {
        string path = Path.Combine(_folder, name);
        File.WriteAllBytes(path, DemoFiles.ForUsers.Single(f => f.Name == name).Bytes);
        return TableReader.Read(path, name);
    }

    [Fact]
    public void The_workbook_holds_the_clean_season_cell_by_cell()
    {
        var clean = Read("ottermoor-season-4.csv");
        var messy = Read("ottermoor-season-4.xlsx");
        Assert.Equal(clean.Columns.Select(c => (c.Name, c.Definition.Kind, c.Definition.Role, c.Definition.Unit)), messy.Columns.Select(c => (c.Name, c.Definition.Kind, c.Definition.Role, c.Definition.Unit)));
        Assert.Equal(clean.Records, messy.Records);
        foreach (var (a, b) in clean.Columns.Zip(messy.Columns))
            for (int row = 0; row < clean.Records; row++)
                Assert.True(string.Equals(a.TextAt(row), b.TextAt(row), StringComparison.Ordinal), $"record {row + 1}, column {a.Name}: '{a.TextAt(row)}' became '{b.TextAt(row)}'");
    }

    [Fact]
    public void Roles_kinds_and_units_are_found_without_help()
    {
        var table = Read("ottermoor-season-4.xlsx");
        RecordColumn Named(string name) => table.Columns.Single(c => c.Name == name);
        Assert.Equal(ColumnRole.Vehicle, Named("Vehicle").Definition.Role);
        Assert.Equal(ColumnRole.RunName, Named("Run").Definition.Role);
        Assert.Equal(ColumnRole.Distance, Named("Distance").Definition.Role);
        Assert.Equal(ColumnRole.Reading, Named("City consumption").Definition.Role);
        Assert.Equal(ColumnRole.Note, Named("Remarks").Definition.Role);
        Assert.Equal("L/100km", Named("City consumption").Definition.Unit);
        Assert.Equal(ColumnKind.OrderedCategory, Named("Load state").Definition.Kind);
        Assert.Equal(["Empty", "Half", "Full"], Named("Load state").Definition.Levels);
        Assert.Equal(ColumnKind.YesNo, Named("Wet").Definition.Kind);
        Assert.Equal(ColumnKind.DateTime, Named("Start").Definition.Kind);
        Assert.Equal(ColumnKind.Category, Named("Driver").Definition.Kind);
    }

    [Fact]
    public void The_later_batch_fits_the_season()
    {
        var season = Read("ottermoor-season-4.csv");
        var batch = Read("lisbraten-winter-batch.csv");
        Assert.Equal(season.Columns.Select(c => (c.Name, c.Definition.Kind, c.Definition.Unit)), batch.Columns.Select(c => (c.Name, c.Definition.Kind, c.Definition.Unit)));
        Assert.Contains(batch.Columns.Single(c => c.Name == "Remarks") is CodedColumn remarks ? remarks.Levels : [], r => r.Contains("Räder", StringComparison.Ordinal));
    }
}
