using System.Text.Json;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Exchange;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Portal.Incoming;

/// <summary>A confirmed upload: files that wait, and how to read them.</summary>
internal sealed record Upload(IReadOnlyList<WaitingFile> Files, string? Name, string Note, ReadChoices Choices, OnRepeat OnRepeat);

/// <summary>Reads waiting files and stores them as a run set or as further records of one. Nothing is stored unless all of it can be.</summary>
internal sealed class Intake(IRunSetStore store, WaitingFiles waiting, PortalSettings settings, ILogger<Intake> log)
{
    public WaitingFiles Waiting { get; } = waiting;

    public ReadLimits Limits { get; } = new() { Columns = settings.Limits.Columns, Cells = settings.Limits.Cells, UnpackedBytes = settings.Limits.UnpackedBytes };

    public long FileBytes => settings.Limits.FileBytes;

    /// <summary>Makes a run set from an upload; files after the first are appended to it in order.</summary>
    public async Task<RunSetInfo> CreateAsync(Upload upload, WriteOptions write, CancellationToken cancel, IProgress<WorkProgress>? progress = null)
    {
        try
        {
            var first = await ReadAsync(upload.Files[0], upload.Choices, progress, cancel);
            var draft = RunSetEdits.Import(first.Columns, Said(upload, upload.Files[0], first)) with
            {
                Marks = first.Marks,
                SetAside = first.SetAside,
                Findings = first.Findings,
                Settings = JsonSerializer.SerializeToElement(first.ReadAs, WireFormat.Json),
            };
            foreach (var more in upload.Files.Skip(1))
            {
                var table = await ReadAsync(more, upload.Choices, progress, cancel);
                var content = RevisionContent.InMemory(draft.Columns, draft.Marks, draft.SetAside);
                var grown = RunSetGrowth.Append(content, table.Columns, table.Marks, upload.OnRepeat, content.Numbers.Highest);
                draft = grown with { Kind = LedgerKinds.Import, Note = draft.Note, Settings = draft.Settings, Findings = [.. draft.Findings, .. table.Findings, .. grown.Findings] };
            }
            draft = draft with { Files = [.. upload.Files.Select(f => new IncomingFile(f.FileName, f.Path))] };
            progress?.Report(new WorkProgress(0.9, "storing"));
            var name = string.IsNullOrWhiteSpace(upload.Name) ? Path.GetFileNameWithoutExtension(upload.Files[0].FileName) : upload.Name.Trim();
            return await store.CreateAsync(name, upload.Note, draft, write, cancel);
        }
        finally
        {
            foreach (var file in upload.Files)
                Waiting.Remove(file);
        }
    }

    /// <summary>Appends the records of an upload to a run set.</summary>
    public async Task<RunSetInfo> AppendAsync(string id, int? basedOn, Upload upload, WriteOptions write, CancellationToken cancel, IProgress<WorkProgress>? progress = null)
    {
        try
        {
            var info = await store.FindAsync(id, null, cancel) ?? throw new NoSuchRunSetException(id);
            var content = await store.OpenAsync(id, null, cancel) ?? throw new NoSuchRunSetException(id);
            int expected = basedOn ?? info.Revision;
            if (expected != info.Revision && write.Idempotency is null)
                throw new StaleRevisionException(expected, info.Revision);
            // a column that the run set knows keeps its kind, so that the new file cannot change what earlier records mean
            var known = content.Definitions.Where(d => upload.Choices.Columns.All(c => c.Name != d.Name))
                .Select(d => new ColumnChoice(d.Name) { Kind = d.Kind, Unit = d.Unit, Role = d.Role, Levels = d.Levels, MissingCodes = d.MissingCodes.Count == 0 ? null : d.MissingCodes });
            var choices = upload.Choices with { Columns = [.. upload.Choices.Columns, .. known] };
            RevisionDraft? draft = null;
            int highest = info.HighestRecord;
            foreach (var file in upload.Files)
            {
                var table = await ReadAsync(file, choices, progress, cancel);
                var grown = RunSetGrowth.Append(content, table.Columns, table.Marks, upload.OnRepeat, highest);
                draft = grown with { Findings = [.. draft?.Findings ?? [], .. table.Findings, .. grown.Findings], Note = $"{grown.Note} from {file.FileName}{(upload.Note.Length > 0 ? ": " + upload.Note : "")}", Settings = JsonSerializer.SerializeToElement(table.ReadAs, WireFormat.Json) };
                highest = draft.Numbers.Highest;
                content = new RevisionContent(id, content.Revision, content.Fingerprint, [.. draft.Columns.Select(c => c.Definition)], draft.Numbers, i => draft.Columns[i], draft.Marks, draft.SetAside);
            }
            draft = draft! with { Files = [.. upload.Files.Select(f => new IncomingFile(f.FileName, f.Path))] };
            return await store.CommitAsync(id, expected, draft, write, cancel);
        }
        finally
        {
            foreach (var file in upload.Files)
                Waiting.Remove(file);
        }
    }

    /// <summary>Loads the demo season into an empty store; a demo that cannot be read is said in the log and never stops the start.</summary>
    public async Task LoadDemoAsync(string folder, CancellationToken cancel)
    {
        string? path = Directory.Exists(folder) ? Directory.EnumerateFiles(folder, "*.csv").Order(StringComparer.Ordinal).FirstOrDefault(p => Path.GetFileName(p).Contains("season", StringComparison.Ordinal)) : null;
        if (path is null || (await store.ListAsync(cancel)).Count > 0)
            return;
        try
        {
            await using var bytes = File.OpenRead(path);
            var file = await Waiting.TakeInAsync(Path.GetFileName(path), bytes, FileBytes, null, cancel);
            await CreateAsync(new Upload([file], "Ottermoor proving season 4", "Invented demo season: no real vehicle, place or person.", new ReadChoices(), OnRepeat.Keep), new WriteOptions(Demo: true), cancel);
        }
        catch (UnreadableFileException e)
        {
            log.LogWarning("The demo season was not loaded: {Reason}", e.Message);
        }
    }

    private Task<ImportedTable> ReadAsync(WaitingFile file, ReadChoices choices, IProgress<WorkProgress>? progress, CancellationToken cancel)
    {
        var stage = progress is null ? null : new Progress<double>(f => progress.Report(new WorkProgress(0.9 * f, $"reading {file.FileName}")));
        return Task.Run(() => TableReader.Read(file.Path, file.FileName, choices, Limits, stage, cancel), cancel);
    }

    private static string Said(Upload upload, WaitingFile file, ImportedTable table) =>
        $"{(table.Columns.Count == 0 ? 0 : table.Columns[0].Count)} records from {file.FileName}{(upload.Note.Length > 0 ? ": " + upload.Note : "")}";
}
