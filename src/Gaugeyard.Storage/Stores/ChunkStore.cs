using System.Buffers.Binary;
using System.Security.Cryptography;
using System.Text.Json;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Storage.Encoding;
using Microsoft.Data.Sqlite;

namespace Gaugeyard.Storage.Stores;

/// <summary>
/// Writes columns and small documents as compressed chunks addressed by the hash of their content, and reads columns back
/// through a bounded cache. Reading is safe from any thread; writing happens inside the caller's transaction.
/// </summary>
internal sealed class ChunkStore(StorageOptions options)
{
    private readonly Lock _gate = new();
    private readonly Dictionary<long, (Column Column, long Bytes, LinkedListNode<long> Node)> _cache = [];
    private readonly LinkedList<long> _order = new();
    private long _cached;

    /// <summary>Encodes, compresses and hashes a column without touching the database.</summary>
    public static PreparedColumn Prepare(Column column, CancellationToken cancel)
    {
        int chunks = (column.Count + ChunkCodec.Size - 1) / ChunkCodec.Size;
        var prepared = new PreparedChunk[chunks];
        for (int k = 0; k < chunks; k++)
        {
            cancel.ThrowIfCancellationRequested();
            int start = k * ChunkCodec.Size;
            prepared[k] = Prepare(ChunkCodec.Encode(column, start, Math.Min(ChunkCodec.Size, column.Count - start)));
        }
        return new PreparedColumn(column, prepared);
    }

    /// <summary>Compresses and hashes bytes.</summary>
    public static PreparedChunk Prepare(byte[] bytes)
    {
        using var compressor = new ZstdSharp.Compressor(1);
        return new PreparedChunk(SHA256.HashData(bytes), compressor.Wrap(bytes).ToArray());
    }

    /// <summary>A small document as chunk.</summary>
    public static PreparedChunk PrepareJson<T>(T document) => Prepare(JsonSerializer.SerializeToUtf8Bytes(document, WireFormat.Json));

    /// <summary>Stores a chunk unless it is there already; gives its id.</summary>
    public static long Write(SqliteConnection connection, SqliteTransaction transaction, PreparedChunk chunk)
    {
        if (Id(connection, transaction, "Chunks", chunk.Hash) is { } known)
            return known;
        using var insert = connection.CreateCommand();
        insert.Transaction = transaction;
        insert.CommandText = "INSERT INTO Chunks (Hash, Payload) VALUES ($hash, $payload) RETURNING Id";
        insert.Parameters.AddWithValue("$hash", chunk.Hash);
        insert.Parameters.AddWithValue("$payload", chunk.Payload);
        return (long)insert.ExecuteScalar()!;
    }

    /// <summary>Stores a column; gives the id and hash of its chunk list.</summary>
    public static (long List, byte[] Hash) Write(SqliteConnection connection, SqliteTransaction transaction, PreparedColumn column)
    {
        var ids = new byte[8 * column.Chunks.Length];
        using var sha = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
        for (int k = 0; k < column.Chunks.Length; k++)
        {
            BinaryPrimitives.WriteInt64LittleEndian(ids.AsSpan(8 * k), Write(connection, transaction, column.Chunks[k]));
            sha.AppendData(column.Chunks[k].Hash);
        }
        byte[] hash = sha.GetHashAndReset();
        if (Id(connection, transaction, "ColumnLists", hash) is { } known)
            return (known, hash);
        using var insert = connection.CreateCommand();
        insert.Transaction = transaction;
        insert.CommandText = "INSERT INTO ColumnLists (Hash, Chunks) VALUES ($hash, $chunks) RETURNING Id";
        insert.Parameters.AddWithValue("$hash", hash);
        insert.Parameters.AddWithValue("$chunks", ids);
        return ((long)insert.ExecuteScalar()!, hash);
    }

    /// <summary>Reads a small document.</summary>
    public static T ReadJson<T>(SqliteConnection connection, long chunk) =>
        JsonSerializer.Deserialize<T>(ReadBytes(connection, chunk), WireFormat.Json)!;

    /// <summary>Reads a column by its chunk list, from memory where it is there.</summary>
    public Column ReadColumn(ColumnDefinition definition, long list)
    {
        lock (_gate)
        {
            if (_cache.TryGetValue(list, out var hit) && hit.Column.Definition.Kind == definition.Kind)
            {
                _order.Remove(hit.Node);
                _order.AddFirst(hit.Node);
                return hit.Column.With(definition);
            }
        }
        using var connection = new SqliteConnection(StoreDatabase.ConnectionString(options));
        connection.Open();
        ConnectionSettings.Apply(connection);
        var column = Decode(connection, definition, list);
        Keep(list, column);
        return column;
    }

    /// <summary>Keeps a column that was just written, so that it need not be read again.</summary>
    public void Keep(long list, Column column)
    {
        long bytes = column switch
        {
            NumberColumn or DateTimeColumn => 8L * column.Count,
            CodedColumn c => 4L * c.Count + c.Levels.Sum(l => 40L + 2 * l.Length),
            _ => 0,
        };
        lock (_gate)
        {
            if (_cache.Remove(list, out var old))
            {
                _order.Remove(old.Node);
                _cached -= old.Bytes;
            }
            _cache[list] = (column, bytes, _order.AddFirst(list));
            _cached += bytes;
            while (_cached > options.ColumnCacheBytes && _order.Count > 1)
            {
                long oldest = _order.Last!.Value;
                _order.RemoveLast();
                _cache.Remove(oldest, out var gone);
                _cached -= gone.Bytes;
            }
        }
    }

    private static Column Decode(SqliteConnection connection, ColumnDefinition definition, long list)
    {
        byte[] ids;
        using (var command = connection.CreateCommand())
        {
            command.CommandText = "SELECT Chunks FROM ColumnLists WHERE Id = $id";
            command.Parameters.AddWithValue("$id", list);
            ids = (byte[]?)command.ExecuteScalar() ?? throw new InvalidDataException($"column list {list} is missing; the store is damaged");
        }
        var payloads = new List<byte[]>(ids.Length / 8);
        for (int k = 0; k < ids.Length; k += 8)
            payloads.Add(ReadBytes(connection, BinaryPrimitives.ReadInt64LittleEndian(ids.AsSpan(k))));
        int count = payloads.Sum(p => ChunkCodec.CountOf(p)), start = 0;
        switch (definition.Kind)
        {
            case ColumnKind.Number:
                var values = new double[count];
                foreach (byte[] payload in payloads)
                {
                    ChunkCodec.DecodeNumbers(payload, values.AsSpan(start));
                    start += ChunkCodec.CountOf(payload);
                }
                return new NumberColumn(definition, values);
            case ColumnKind.DateTime:
                var ticks = new long[count];
                foreach (byte[] payload in payloads)
                {
                    ChunkCodec.DecodeDates(payload, ticks.AsSpan(start));
                    start += ChunkCodec.CountOf(payload);
                }
                return new DateTimeColumn(definition, ticks);
            default:
                var codes = new int[count];
                List<string> levels = definition.Kind switch
                {
                    ColumnKind.YesNo => [.. CodedColumn.NoYes],
                    ColumnKind.OrderedCategory => [.. definition.Levels ?? []],
                    _ => [],
                };
                var index = levels.Select((l, i) => (l, i)).ToDictionary(x => x.l, x => x.i, StringComparer.Ordinal);
                foreach (byte[] payload in payloads)
                {
                    ChunkCodec.DecodeCodes(payload, codes.AsSpan(start), levels, index);
                    start += ChunkCodec.CountOf(payload);
                }
                return new CodedColumn(definition, [.. levels], codes);
        }
    }

    private static byte[] ReadBytes(SqliteConnection connection, long chunk)
    {
        using var command = connection.CreateCommand();
        command.CommandText = "SELECT Payload FROM Chunks WHERE Id = $id";
        command.Parameters.AddWithValue("$id", chunk);
        byte[] payload = (byte[]?)command.ExecuteScalar() ?? throw new InvalidDataException($"chunk {chunk} is missing; the store is damaged");
        using var decompressor = new ZstdSharp.Decompressor();
        return decompressor.Unwrap(payload).ToArray();
    }

    private static long? Id(SqliteConnection connection, SqliteTransaction transaction, string table, byte[] hash)
    {
        using var select = connection.CreateCommand();
        select.Transaction = transaction;
        select.CommandText = $"SELECT Id FROM {table} WHERE Hash = $hash";
        select.Parameters.AddWithValue("$hash", hash);
        return (long?)select.ExecuteScalar();
    }
}

/// <summary>Compressed bytes with the hash of what they hold.</summary>
internal sealed record PreparedChunk(byte[] Hash, byte[] Payload);

/// <summary>A column ready to be written.</summary>
internal sealed record PreparedColumn(Column Column, PreparedChunk[] Chunks);
