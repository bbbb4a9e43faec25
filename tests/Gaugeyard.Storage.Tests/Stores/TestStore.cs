using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.RunSets;
using Microsoft.Data.Sqlite;
using Microsoft.Extensions.DependencyInjection;

namespace Gaugeyard.Storage.Tests.Stores;

/// <summary>A store in a folder of its own, which can be closed and opened again.</summary>
internal sealed class TestStore : IDisposable
{
    private ServiceProvider _services;

    public TestStore()
    {
        Folder = Directory.CreateTempSubdirectory("gaugeyard-").FullName;
        _services = Open();
    }

    public string Folder { get; }

    public IRunSetStore Store => _services.GetRequiredService<IRunSetStore>();

    public void Reopen()
    {
        _services.Dispose();
        SqliteConnection.ClearAllPools();
        _services = Open();
    }

    public void Dispose()
    {
        _services.Dispose();
        SqliteConnection.ClearAllPools();
        Directory.Delete(Folder, recursive: true);
    }

    private ServiceProvider Open()
    {
        var services = new ServiceCollection();
        services.AddSingleton(TimeProvider.System);
        services.AddSingleton<ICurrentUser, Tester>();
        services.AddRunSetStore(new StorageOptions(Folder));
        var built = services.BuildServiceProvider();
        built.PrepareRunSetStoreAsync().GetAwaiter().GetResult();
        return built;
    }

    public static RevisionDraft Season(int records = 200_000)
    {
        var random = new Random(4);
        return RunSetEdits.Import(
        [
            CodedColumn.FromTexts(new ColumnDefinition("run", ColumnKind.Text) { Role = ColumnRole.RunName }, [.. Enumerable.Range(0, records).Select(i => $"R{i}")]),
            CodedColumn.FromTexts(new ColumnDefinition("vehicle", ColumnKind.Category) { Role = ColumnRole.Vehicle }, [.. Enumerable.Range(0, records).Select(i => $"V{i % 97}")]),
            new NumberColumn(new ColumnDefinition("city", ColumnKind.Number) { Role = ColumnRole.Reading, Unit = "L/100km" }, [.. Enumerable.Range(0, records).Select(_ => random.Next(20) == 0 ? double.NaN : Math.Round(5 + 10 * random.NextDouble(), 2))]),
            new DateTimeColumn(new ColumnDefinition("at", ColumnKind.DateTime), [.. Enumerable.Range(0, records).Select(i => new DateTime(2031, 1, 1).AddMinutes(i).Ticks)]),
        ], "season");
    }

    private sealed class Tester : ICurrentUser
    {
        public string Name => "tester";
    }
}
