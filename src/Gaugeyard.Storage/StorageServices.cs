using Gaugeyard.Records.RunSets;
using Gaugeyard.Storage.Model;
using Gaugeyard.Storage.Stores;
using Microsoft.EntityFrameworkCore;
using Microsoft.Extensions.DependencyInjection;

namespace Gaugeyard.Storage;

/// <summary>Puts the store into a host.</summary>
public static class StorageServices
{
    /// <summary>Registers <see cref="IRunSetStore"/> on a SQLite file below the folder.</summary>
    public static IServiceCollection AddRunSetStore(this IServiceCollection services, StorageOptions options)
    {
        services.AddSingleton(options);
        services.AddDbContextFactory<StoreContext>(db => db
            .UseSqlite(StoreDatabase.ConnectionString(options))
            .AddInterceptors(new ConnectionSettings()));
        services.AddSingleton<StoreDatabase>();
        services.AddSingleton<ChunkStore>();
        services.AddSingleton<IRunSetStore, RunSetStore>();
        return services;
    }

    /// <summary>Makes or upgrades the database, warms it up and clears what the bin no longer needs to keep. Call once at start.</summary>
    public static async Task PrepareRunSetStoreAsync(this IServiceProvider services, CancellationToken cancel = default)
    {
        await services.GetRequiredService<StoreDatabase>().PrepareAsync(cancel).ConfigureAwait(false);
        await services.GetRequiredService<IRunSetStore>().ListAsync(cancel).ConfigureAwait(false);
    }
}
