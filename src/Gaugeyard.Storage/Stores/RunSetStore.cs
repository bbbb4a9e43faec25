using System.Globalization;
using System.Security.Cryptography;
using System.Text;
using System.Text.Json;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Gaugeyard.Storage.Model;
using Microsoft.Data.Sqlite;
using Microsoft.EntityFrameworkCore;
using Microsoft.EntityFrameworkCore.Storage;

namespace Gaugeyard.Storage.Stores;

/// <summary>The store on SQLite: columns as chunks, revisions as lists of chunks, one transaction per write.</summary>
internal sealed class RunSetStore(StorageOptions options, IDbContextFactory<StoreContext> contexts, ChunkStore chunks, ICurrentUser user, TimeProvider clock)
    : IRunSetStore, IDisposable
{
    private const int ContentsKept = 24;
    private readonly SemaphoreSlim _writing = new(1);
    private readonly Lock _gate = new();
    private readonly LinkedList<RevisionContent> _contents = new();

    public event Action<string, int>? Committed;

    public async Task<IReadOnlyList<RunSetInfo>> ListAsync(CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var rows = await (from set in db.RunSets
                          where set.DeletedAt == null
                          join revision in db.Revisions on new { Id = set.Id, Number = set.Latest } equals new { Id = revision.RunSetId, revision.Number }
                          orderby revision.At descending
                          select new { set, revision.Number, revision.At, revision.Summary }).AsNoTracking().ToListAsync(cancel).ConfigureAwait(false);
        return [.. rows.Select(r => Info(r.set, r.Number, r.At, Unpack<Summary>(r.Summary), [], 0))];
    }

    public async Task<RunSetInfo?> FindAsync(string id, int? revision = null, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        return await FindAsync(db, id, revision, cancel).ConfigureAwait(false);
    }

    public async Task<RevisionContent?> OpenAsync(string id, int? revision = null, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var set = await db.RunSets.AsNoTracking().FirstOrDefaultAsync(s => s.Id == id && s.DeletedAt == null, cancel).ConfigureAwait(false);
        if (set is null)
            return null;
        int number = revision ?? set.Latest;
        lock (_gate)
        {
            for (var node = _contents.First; node is not null; node = node.Next)
            {
                if (node.Value.RunSetId != id || node.Value.Revision != number)
                    continue;
                _contents.Remove(node);
                _contents.AddFirst(node);
                return node.Value;
            }
        }
        var row = await db.Revisions.AsNoTracking().FirstOrDefaultAsync(r => r.RunSetId == id && r.Number == number, cancel).ConfigureAwait(false);
        if (row is null)
            return null;
        var manifest = Unpack<Manifest>(row.Manifest);
        var connection = (SqliteConnection)db.Database.GetDbConnection();
        await db.Database.OpenConnectionAsync(cancel).ConfigureAwait(false);
        var marks = manifest.Marks.ToDictionary(
            m => m.Key, m => (IReadOnlyDictionary<int, CellMark>)ChunkStore.ReadJson<Dictionary<int, CellMark>>(connection, m.Value), StringComparer.Ordinal);
        var setAside = manifest.SetAside is { } chunk ? ChunkStore.ReadJson<Dictionary<int, string>>(connection, chunk) : [];
        return Remember(Content(id, number, row.Content, manifest, marks, setAside));
    }

    public async Task<RunSetInfo> CreateAsync(string name, string note, RevisionDraft draft, WriteOptions? write = null, CancellationToken cancel = default)
    {
        var prepared = Prepare(draft, cancel);
        var incoming = await TakeInAsync(draft.Files, cancel).ConfigureAwait(false);
        await _writing.WaitAsync(cancel).ConfigureAwait(false);
        RunSetInfo info;
        try
        {
            await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
            if (await RepeatedAsync(db, write, null, cancel).ConfigureAwait(false) is { } again)
                return again;
            await using var transaction = await db.Database.BeginTransactionAsync(cancel).ConfigureAwait(false);
            var set = new RunSetRow
            {
                Id = Guid.CreateVersion7(clock.GetUtcNow()).ToString("N"),
                Name = name,
                Note = note,
                CreatedAt = clock.GetUtcNow().UtcDateTime,
                Demo = write?.Demo ?? false,
            };
            db.RunSets.Add(set);
            info = await WriteRevisionAsync(db, transaction, set, null, draft, prepared, incoming, write, cancel).ConfigureAwait(false);
        }
        finally
        {
            _writing.Release();
        }
        Committed?.Invoke(info.Id, info.Revision);
        return info;
    }

    public async Task<RunSetInfo> CommitAsync(string id, int basedOn, RevisionDraft draft, WriteOptions? write = null, CancellationToken cancel = default)
    {
        var prepared = Prepare(draft, cancel);
        var incoming = await TakeInAsync(draft.Files, cancel).ConfigureAwait(false);
        await _writing.WaitAsync(cancel).ConfigureAwait(false);
        RunSetInfo info;
        try
        {
            await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
            if (await RepeatedAsync(db, write, id, cancel).ConfigureAwait(false) is { } again)
                return again;
            await using var transaction = await db.Database.BeginTransactionAsync(cancel).ConfigureAwait(false);
            var set = await db.RunSets.FirstOrDefaultAsync(s => s.Id == id && s.DeletedAt == null, cancel).ConfigureAwait(false) ?? throw new NoSuchRunSetException(id);
            if (set.Latest != basedOn)
                throw new StaleRevisionException(basedOn, set.Latest);
            string previous = await db.Revisions.Where(r => r.RunSetId == id && r.Number == basedOn).Select(r => r.Fingerprint).FirstAsync(cancel).ConfigureAwait(false);
            info = await WriteRevisionAsync(db, transaction, set, previous, draft, prepared, incoming, write, cancel).ConfigureAwait(false);
        }
        finally
        {
            _writing.Release();
        }
        Committed?.Invoke(info.Id, info.Revision);
        return info;
    }

    public async Task<IReadOnlyList<LedgerEntry>> LedgerAsync(string id, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var rows = await db.Revisions.AsNoTracking().Where(r => r.RunSetId == id).OrderBy(r => r.Number)
            .Select(r => new { r.Number, r.At, r.By, r.Kind, r.Note, r.Settings, r.Fingerprint }).ToListAsync(cancel).ConfigureAwait(false);
        return [.. rows.Select(r => new LedgerEntry(r.Number, Utc(r.At), r.By, r.Kind, r.Note, Parse(r.Settings), r.Fingerprint))];
    }

    public async Task<IReadOnlyList<SourceFile>> SourcesAsync(string id, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        return await db.Sources.AsNoTracking().Where(s => s.RunSetId == id).OrderBy(s => s.Number)
            .Select(s => new SourceFile(s.Number, s.FileName, s.Bytes, s.Hash, s.Revision)).ToListAsync(cancel).ConfigureAwait(false);
    }

    public async Task<(SourceFile File, Stream Bytes)?> OpenSourceAsync(string id, int number, CancellationToken cancel = default)
    {
        var file = (await SourcesAsync(id, cancel).ConfigureAwait(false)).FirstOrDefault(s => s.Number == number);
        if (file is null || !File.Exists(SourcePath(file.Hash)))
            return null;
        return (file, new FileStream(SourcePath(file.Hash), FileMode.Open, FileAccess.Read, FileShare.Read, 1 << 16, useAsync: true));
    }

    public Task<bool> DeleteAsync(string id, CancellationToken cancel = default) => BinAsync(id, clock.GetUtcNow().UtcDateTime, cancel);

    public Task<bool> UndeleteAsync(string id, CancellationToken cancel = default) => BinAsync(id, null, cancel);

    public async Task<IReadOnlyList<Slice>> SlicesAsync(string id, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var rows = await db.Slices.AsNoTracking().Where(s => s.RunSetId == id).OrderBy(s => s.Name).ToListAsync(cancel).ConfigureAwait(false);
        return [.. rows.Select(r => new Slice(r.Name, JsonSerializer.Deserialize<List<SliceCondition>>(r.Conditions, WireFormat.Json)!))];
    }

    public async Task KeepSliceAsync(string id, Slice slice, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var row = await db.Slices.FirstOrDefaultAsync(s => s.RunSetId == id && s.Name == slice.Name, cancel).ConfigureAwait(false);
        if (row is null)
            db.Slices.Add(row = new SliceRow { RunSetId = id, Name = slice.Name, Conditions = "[]" });
        row.Conditions = JsonSerializer.Serialize(slice.Conditions, WireFormat.Json);
        await db.SaveChangesAsync(cancel).ConfigureAwait(false);
    }

    public async Task RemoveSliceAsync(string id, string name, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        await db.Slices.Where(s => s.RunSetId == id && s.Name == name).ExecuteDeleteAsync(cancel).ConfigureAwait(false);
    }

    public async Task<IReadOnlyList<Pin>> PinsAsync(string id, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var rows = await db.Pins.AsNoTracking().Where(p => p.RunSetId == id).OrderBy(p => p.Place).ThenBy(p => p.Id).ToListAsync(cancel).ConfigureAwait(false);
        return [.. rows.Select(r => new Pin(r.Id, JsonSerializer.Deserialize<NewPin>(r.Result, WireFormat.Json)!, r.By, Utc(r.At)))];
    }

    public async Task<Pin> PinAsync(string id, NewPin pin, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        int place = await db.Pins.CountAsync(p => p.RunSetId == id, cancel).ConfigureAwait(false);
        var row = new PinRow { RunSetId = id, Place = place, Result = JsonSerializer.Serialize(pin, WireFormat.Json), By = user.Name, At = clock.GetUtcNow().UtcDateTime };
        db.Pins.Add(row);
        await db.SaveChangesAsync(cancel).ConfigureAwait(false);
        return new Pin(row.Id, pin, row.By, Utc(row.At));
    }

    public async Task UnpinAsync(string id, long pin, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        await db.Pins.Where(p => p.RunSetId == id && p.Id == pin).ExecuteDeleteAsync(cancel).ConfigureAwait(false);
    }

    public async Task MovePinAsync(string id, long pin, int place, CancellationToken cancel = default)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        var rows = await db.Pins.Where(p => p.RunSetId == id).OrderBy(p => p.Place).ThenBy(p => p.Id).ToListAsync(cancel).ConfigureAwait(false);
        if (rows.Find(r => r.Id == pin) is not { } moved)
            return;
        rows.Remove(moved);
        rows.Insert(Math.Clamp(place, 0, rows.Count), moved);
        for (int i = 0; i < rows.Count; i++)
            rows[i].Place = i;
        await db.SaveChangesAsync(cancel).ConfigureAwait(false);
    }

    public void Dispose() => _writing.Dispose();

    private sealed record Prepared(PreparedColumn[] Columns, Dictionary<string, PreparedChunk> Marks, PreparedChunk? SetAside, PreparedChunk? Findings, Summary Summary);

    // everything that costs time happens before the transaction begins
    private static Prepared Prepare(RevisionDraft draft, CancellationToken cancel)
    {
        foreach (var column in draft.Columns)
            if (column.Count != draft.Numbers.Count)
                throw new ArgumentException($"column '{column.Name}' must have {draft.Numbers.Count} values but has {column.Count}", nameof(draft));
        var columns = new PreparedColumn[draft.Columns.Count];
        Parallel.For(0, columns.Length, new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = Environment.ProcessorCount },
            i => columns[i] = ChunkStore.Prepare(draft.Columns[i], cancel));
        var marks = draft.Marks.Where(m => m.Value.Count > 0)
            .ToDictionary(m => m.Key, m => ChunkStore.PrepareJson(new SortedDictionary<int, CellMark>(m.Value.ToDictionary(x => x.Key, x => x.Value))), StringComparer.Ordinal);
        var setAside = draft.SetAside.Count == 0 ? null : ChunkStore.PrepareJson(new SortedDictionary<int, string>(draft.SetAside.ToDictionary(x => x.Key, x => x.Value)));
        var findings = draft.Findings.Count == 0 ? null : ChunkStore.PrepareJson(new StoredFindings(draft.Findings));
        return new Prepared(columns, marks, setAside, findings, Summaries.Of(draft));
    }

    private async Task<RunSetInfo> WriteRevisionAsync(StoreContext db, IDbContextTransaction transaction, RunSetRow set, string? previous, RevisionDraft draft, Prepared prepared, List<SourceRow> incoming, WriteOptions? write, CancellationToken cancel)
    {
        var connection = (SqliteConnection)db.Database.GetDbConnection();
        var inner = (SqliteTransaction)transaction.GetDbTransaction();
        using var content = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
        var columns = new ManifestColumn[prepared.Columns.Length];
        for (int i = 0; i < columns.Length; i++)
        {
            cancel.ThrowIfCancellationRequested();
            var (list, hash) = ChunkStore.Write(connection, inner, prepared.Columns[i]);
            columns[i] = new ManifestColumn(prepared.Columns[i].Column.Definition, list);
            content.AppendData(JsonSerializer.SerializeToUtf8Bytes(columns[i].Definition, WireFormat.Json));
            content.AppendData(hash);
        }
        var marks = new SortedDictionary<string, long>(StringComparer.Ordinal);
        foreach (var (name, chunk) in prepared.Marks.OrderBy(m => m.Key, StringComparer.Ordinal))
        {
            marks[name] = ChunkStore.Write(connection, inner, chunk);
            content.AppendData(chunk.Hash);
        }
        long? setAside = prepared.SetAside is null ? null : ChunkStore.Write(connection, inner, prepared.SetAside);
        content.AppendData(prepared.SetAside?.Hash ?? []);
        long? findings = prepared.Findings is null ? null : ChunkStore.Write(connection, inner, prepared.Findings);
        var manifest = new Manifest(columns, [.. draft.Numbers.Runs.Select(r => new[] { r.First, r.Count })], marks, setAside, findings);
        content.AppendData(JsonSerializer.SerializeToUtf8Bytes(manifest.Numbers, WireFormat.Json));
        string contentHash = Convert.ToHexStringLower(content.GetHashAndReset());

        set.Latest++;
        set.HighestRecord = Math.Max(set.HighestRecord, draft.Numbers.Highest);
        var at = clock.GetUtcNow().UtcDateTime;
        string? settings = draft.Settings?.GetRawText();
        var row = new RevisionRow
        {
            RunSetId = set.Id,
            Number = set.Latest,
            At = at,
            By = user.Name,
            Kind = draft.Kind,
            Note = draft.Note,
            Settings = settings,
            Content = contentHash,
            Fingerprint = LedgerSeal.Of(previous, set.Latest, contentHash, at, user.Name, draft.Kind, draft.Note, settings),
            Manifest = Pack(manifest),
            Summary = Pack(prepared.Summary),
        };
        db.Revisions.Add(row);
        int number = await db.Sources.CountAsync(s => s.RunSetId == set.Id, cancel).ConfigureAwait(false);
        foreach (var source in incoming)
        {
            source.RunSetId = set.Id;
            source.Number = ++number;
            source.Revision = set.Latest;
            db.Sources.Add(source);
        }
        if (write?.Idempotency is { } key)
            db.RepeatKeys.Add(new RepeatKeyRow { Key = key, RunSetId = set.Id, Revision = set.Latest, At = at });
        await db.SaveChangesAsync(cancel).ConfigureAwait(false);
        // past this point the write is done whatever the caller wishes
        await transaction.CommitAsync(CancellationToken.None).ConfigureAwait(false);

        for (int i = 0; i < columns.Length; i++)
            chunks.Keep(columns[i].List, prepared.Columns[i].Column);
        Remember(Content(set.Id, set.Latest, contentHash, manifest, draft.Marks, draft.SetAside));
        return Info(set, set.Latest, at, prepared.Summary, draft.Findings, number);
    }

    private RevisionContent Content(string id, int revision, string hash, Manifest manifest, IReadOnlyDictionary<string, IReadOnlyDictionary<int, CellMark>> marks, IReadOnlyDictionary<int, string> setAside) =>
        new(id, revision, hash, [.. manifest.Columns.Select(c => c.Definition)], new RecordNumbers(manifest.Numbers.Select(n => (n[0], n[1]))),
            i => chunks.ReadColumn(manifest.Columns[i].Definition, manifest.Columns[i].List), marks, setAside);

    private RevisionContent Remember(RevisionContent content)
    {
        lock (_gate)
        {
            _contents.AddFirst(content);
            while (_contents.Count > ContentsKept)
                _contents.RemoveLast();
        }
        return content;
    }

    private static async Task<RunSetInfo?> FindAsync(StoreContext db, string id, int? revision, CancellationToken cancel)
    {
        var set = await db.RunSets.AsNoTracking().FirstOrDefaultAsync(s => s.Id == id && s.DeletedAt == null, cancel).ConfigureAwait(false);
        if (set is null)
            return null;
        int number = revision ?? set.Latest;
        var row = await db.Revisions.AsNoTracking().FirstOrDefaultAsync(r => r.RunSetId == id && r.Number == number, cancel).ConfigureAwait(false);
        if (row is null)
            return null;
        IReadOnlyList<Finding> findings = [];
        if (Unpack<Manifest>(row.Manifest).Findings is { } chunk)
        {
            await db.Database.OpenConnectionAsync(cancel).ConfigureAwait(false);
            findings = ChunkStore.ReadJson<StoredFindings>((SqliteConnection)db.Database.GetDbConnection(), chunk).Findings;
        }
        int sources = await db.Sources.CountAsync(s => s.RunSetId == id, cancel).ConfigureAwait(false);
        return Info(set, number, row.At, Unpack<Summary>(row.Summary), findings, sources);
    }

    // the answer to a write that was done before under the same key
    private static async Task<RunSetInfo?> RepeatedAsync(StoreContext db, WriteOptions? write, string? id, CancellationToken cancel)
    {
        if (write?.Idempotency is not { } key)
            return null;
        var done = await db.RepeatKeys.AsNoTracking().FirstOrDefaultAsync(k => k.Key == key && (id == null || k.RunSetId == id), cancel).ConfigureAwait(false);
        return done is null ? null : await FindAsync(db, done.RunSetId, done.Revision, cancel).ConfigureAwait(false);
    }

    // the bytes are on disk under their hash before the transaction refers to them; a file without a row is harmless
    private async Task<List<SourceRow>> TakeInAsync(IReadOnlyList<IncomingFile> files, CancellationToken cancel)
    {
        var rows = new List<SourceRow>();
        foreach (var file in files)
        {
            string hash;
            long length;
            await using (var stream = new FileStream(file.WaitingAt, FileMode.Open, FileAccess.ReadWrite, FileShare.Read))
            {
                hash = Convert.ToHexStringLower(await SHA256.HashDataAsync(stream, cancel).ConfigureAwait(false));
                length = stream.Length;
                stream.Flush(flushToDisk: true);
            }
            string target = SourcePath(hash);
            if (!File.Exists(target))
                File.Copy(file.WaitingAt, target + ".part", overwrite: true);
            if (!File.Exists(target))
                File.Move(target + ".part", target);
            rows.Add(new SourceRow { RunSetId = "", FileName = file.FileName, Bytes = length, Hash = hash });
        }
        return rows;
    }

    private string SourcePath(string hash) => Path.Combine(options.SourceFolder, hash);

    private async Task<bool> BinAsync(string id, DateTime? at, CancellationToken cancel)
    {
        await using var db = await contexts.CreateDbContextAsync(cancel).ConfigureAwait(false);
        return await db.RunSets.Where(s => s.Id == id && (s.DeletedAt == null) == (at != null))
            .ExecuteUpdateAsync(u => u.SetProperty(s => s.DeletedAt, at), cancel).ConfigureAwait(false) == 1;
    }

    private static RunSetInfo Info(RunSetRow set, int revision, DateTime at, Summary summary, IReadOnlyList<Finding> findings, int sources) =>
        new(set.Id, set.Name, set.Note, revision, Utc(at), summary.Records, summary.Vehicles, summary.SetAside, summary.Columns, findings, sources, set.Demo, set.HighestRecord);

    private static DateTimeOffset Utc(DateTime at) => new(DateTime.SpecifyKind(at, DateTimeKind.Utc));

    private static JsonElement? Parse(string? json) => json is null ? null : JsonDocument.Parse(json).RootElement;

    private static byte[] Pack<T>(T document) => ChunkStore.PrepareJson(document).Payload;

    private static T Unpack<T>(byte[] payload)
    {
        using var decompressor = new ZstdSharp.Decompressor();
        return JsonSerializer.Deserialize<T>(decompressor.Unwrap(payload), WireFormat.Json)!;
    }
}

/// <summary>Seals ledger entries into a chain: each carries a hash over itself and the one before.</summary>
internal static class LedgerSeal
{
    public static string Of(string? previous, int revision, string content, DateTime at, string by, string kind, string note, string? settings) =>
        Convert.ToHexStringLower(SHA256.HashData(System.Text.Encoding.UTF8.GetBytes(string.Join('\n',
            previous ?? "", revision.ToString(CultureInfo.InvariantCulture), content, at.ToString("O", CultureInfo.InvariantCulture), by, kind, note, settings ?? ""))));
}
