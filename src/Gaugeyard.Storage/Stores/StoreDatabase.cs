using System.Data.Common;
using Gaugeyard.Storage.Model;
using Microsoft.Data.Sqlite;
using Microsoft.EntityFrameworkCore;
using Microsoft.EntityFrameworkCore.Diagnostics;

namespace Gaugeyard.Storage.Stores;

/// <summary>Makes the database file as the store wants it and brings it to the current schema.</summary>
internal sealed class StoreDatabase(StorageOptions options, IDbContextFactory<StoreContext> contexts)
{
    public static string ConnectionString(StorageOptions options) =>
        new SqliteConnectionStringBuilder { DataSource = Path.GetFullPath(options.DatabaseFile), DefaultTimeout = 30 }.ToString();

    public async Task PrepareAsync(CancellationToken cancel)
    {
        Directory.CreateDirectory(options.Folder);
        Directory.CreateDirectory(options.SourceFolder);
        if (!File.Exists(options.DatabaseFile))
        {
            // page size and vacuum mode can only be set before the first table
            await using var connection = new SqliteConnection(ConnectionString(options));
            await connection.OpenAsync(cancel).ConfigureAwait(false);
            await using var command = connection.CreateCommand();
            command.CommandText = "PRAGMA page_size=16384; PRAGMA auto_vacuum=INCREMENTAL; PRAGMA journal_mode=WAL; PRAGMA user_version=1;";
            await command.ExecuteNonQueryAsync(cancel).ConfigureAwait(false);
        }
        await using var context = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        await context.Database.MigrateAsync(cancel).ConfigureAwait(false);
    }
}

/// <summary>Sets what SQLite forgets with each connection: full durability and patience with another writer.</summary>
internal sealed class ConnectionSettings : DbConnectionInterceptor
{
    private const string Settings = "PRAGMA synchronous=FULL; PRAGMA busy_timeout=30000; PRAGMA journal_size_limit=16777216; PRAGMA foreign_keys=ON;";

    public override void ConnectionOpened(DbConnection connection, ConnectionEndEventData eventData) => Apply(connection);

    public override Task ConnectionOpenedAsync(DbConnection connection, ConnectionEndEventData eventData, CancellationToken cancellationToken = default)
    {
        Apply(connection);
        return Task.CompletedTask;
    }

    public static void Apply(DbConnection connection)
    {
        using var command = connection.CreateCommand();
        command.CommandText = Settings;
        command.ExecuteNonQuery();
    }
}
