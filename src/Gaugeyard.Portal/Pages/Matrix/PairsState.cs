using System.Globalization;
using System.Text;
using System.Text.Json;
using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Portal.Plots;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Portal.Pages.Matrix;

/// <summary>
/// What the Pairs page shows: the settings of its sentence, the answer, the selection. One per page; a newer question stops the older one.
/// </summary>
internal sealed class PairsState(Answerer answerer, IRunSetStore store) : IDisposable
{
    private CancellationTokenSource? _stop;

    public RevisionContent? Content { get; private set; }

    public StandoutsQuestion Question { get; private set; } = new();

    public string? Colour { get; private set; }

    public StandoutsAnswer? Answer { get; private set; }

    /// <summary>Why there is no answer.</summary>
    public string? Refusal { get; private set; }

    public WorkProgress? Progress { get; private set; }

    public bool Working { get; private set; }

    public MatrixSelection? Selection { get; set; }

    public int? OpenRecord { get; set; }

    /// <summary>What was just done, for the person.</summary>
    public string? Done { get; set; }

    public event Action? Changed;

    public PointsQuestion Points => new()
    {
        Revision = Content?.Revision, Slice = Question.Slice, WithFilled = Question.WithFilled, Vehicles = Question.Vehicles, Readings = [.. Question.Readings.Take(PointsQuestion.MostReadings)], Colour = Colour,
    };

    public IEnumerable<ColumnDefinition> NumberColumns => Content?.Definitions.Where(d => d.Kind == ColumnKind.Number) ?? [];

    public IEnumerable<ColumnDefinition> Categories => Content?.Definitions.Where(d => d.Kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.YesNo) ?? [];

    /// <summary>Takes the settings of an address and asks. Nothing in the address means the usual: the readings, coloured by the first category of few levels.</summary>
    public async Task OpenAsync(string runSet, PairsAddress address, IReadOnlyList<SliceCondition> slice)
    {
        Content = await store.OpenAsync(runSet, address.Revision) ?? throw new NoSuchRunSetException(runSet, address.Revision);
        string[] known = [.. address.Readings.Where(r => Content.Find(r)?.Kind == ColumnKind.Number).Distinct(StringComparer.Ordinal)];
        var readings = known.Length > 0 ? known : Usual();
        Colour = address.Colour is null ? FirstCategory() : Content.Find(address.Colour)?.Name;
        Question = new StandoutsQuestion
        {
            Revision = Content.Revision, Slice = slice, Readings = readings, WithFilled = address.WithFilled, Vehicles = address.Ignore ? VehicleUse.Ignore : VehicleUse.AsRecorded,
            Among = address.Among is { } among && Categories.Any(c => c.Name == among) ? among : null, Cut = address.Cut is > 0 and <= 0.5 ? address.Cut.Value : 0.05,
        };
        Selection = null;
        await AskAsync();
    }

    public void Stop() => _stop?.Cancel();

    public async Task AskAsync()
    {
        _stop?.Cancel();
        var stop = _stop = new CancellationTokenSource();
        (Working, Refusal, Answer, Progress) = (true, null, null, null);
        Changed?.Invoke();
        try
        {
            var answer = await answerer.AskAsync(Content!, Question, new Throttled(this, stop), stop.Token);
            if (stop == _stop)
                Answer = answer;
        }
        catch (Exception e) when (e is CannotAnswerException or QuestionException)
        {
            if (stop == _stop)
                Refusal = e.Message;
        }
        catch (OperationCanceledException)
        {
            if (stop == _stop)
                Refusal = "Stopped. Change the question, or ask again.";
        }
        finally
        {
            if (stop == _stop)
                Working = false;
            Changed?.Invoke();
        }
    }

    /// <summary>A slice that holds exactly the selected records: by ranges where the selection is of ranges, else by run names.</summary>
    public IReadOnlyList<SliceCondition>? Conditions(MatrixSelection selection) =>
        selection.Conditions is { } ranges
            ? [.. ranges.Select(r => new SliceCondition(r.Column) { From = Element(r.From), To = Element(r.To) })]
            : selection.Complete ? ByName(selection.Records) : null;

    /// <summary>Conditions that pick these records by run name, or, for whole vehicles, by vehicle; null when no column tells them apart.</summary>
    public IReadOnlyList<SliceCondition>? ByName(IReadOnlyList<int> records)
    {
        foreach (var role in (ReadOnlySpan<ColumnRole>)[ColumnRole.Vehicle, ColumnRole.RunName])
            if (Content!.FindRole(role) is { } definition && Content.Column(definition.Name) is CodedColumn column)
            {
                var rows = records.Select(Content.Numbers.RowOf).Where(r => r >= 0 && column.Codes[r] >= 0).ToArray();
                var levels = rows.Select(r => column.Codes[r]).ToHashSet();
                if (rows.Length == records.Count && column.Codes.Count(levels.Contains) == records.Count)
                    return [new SliceCondition(definition.Name) { Is = [.. levels.Select(k => JsonSerializer.SerializeToElement(column.Levels[k]))] }];
            }
        return null;
    }

    public async Task KeepSliceAsync(string name, IReadOnlyList<SliceCondition> conditions)
    {
        await store.KeepSliceAsync(Content!.RunSetId, new Slice(name.Trim(), [.. Question.Slice, .. conditions]));
        Done = $"Kept as slice “{name.Trim()}”. Choose it in the bar above on any page.";
        Changed?.Invoke();
    }

    /// <summary>Sets records aside with a reason; gives a sentence when it could not be done.</summary>
    public async Task<string?> SetAsideAsync(IReadOnlyList<int> records, string reason)
    {
        try
        {
            var draft = RunSetEdits.SetAside(Content!, [.. records.Select(r => new Exclusion(r, null, reason))]);
            var info = await store.CommitAsync(Content!.RunSetId, Content.Revision, draft);
            Done = $"{records.Count:N0} {(records.Count == 1 ? "record" : "records")} set aside in revision {info.Revision}. The Ledger can bring them back.";
            return null;
        }
        catch (Exception e) when (e is EditException or StaleRevisionException)
        {
            return e.Message;
        }
    }

    /// <summary>Record numbers of a selection; null when it is too large to name and not of ranges.</summary>
    public IReadOnlyList<int>? RecordsOf(MatrixSelection selection)
    {
        if (selection.Complete)
            return selection.Records;
        if (Conditions(selection) is not { } conditions)
            return null;
        bool[] keep = SliceFilter.Select(Content!, [.. Question.Slice, .. conditions]);
        return [.. Enumerable.Range(0, keep.Length).Where(row => keep[row] && !Content!.SetAside.ContainsKey(Content.Numbers[row])).Select(row => Content!.Numbers[row])];
    }

    public async Task PinAsync(string address, string basis, byte[]? png)
    {
        var answer = Answer!;
        await store.PinAsync(Content!.RunSetId, new NewPin("Pairs", address, answer.Headline, basis)
        {
            Picture = png is null ? null : Picture(png),
            Figures = PairsTables.Standouts(answer, most: 20),
            Notes = answer.Notes,
            Revision = Content.Revision,
            Fingerprint = answer.Basis.Fingerprint,
        });
        Done = "Pinned to the Brief.";
        Changed?.Invoke();
    }

    public void Dispose() => _stop?.Cancel();

    /// <summary>The canvas in a frame of SVG, since that is what a Brief holds; width and height stand at bytes 16 to 23 of every PNG.</summary>
    private static string Picture(byte[] png)
    {
        int width = System.Buffers.Binary.BinaryPrimitives.ReadInt32BigEndian(png.AsSpan(16)), height = System.Buffers.Binary.BinaryPrimitives.ReadInt32BigEndian(png.AsSpan(20));
        return new StringBuilder()
            .Append(CultureInfo.InvariantCulture, $"<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width} {height}\" role=\"img\"><title>Scatter matrix</title><image width=\"{width}\" height=\"{height}\" href=\"data:image/png;base64,")
            .Append(Convert.ToBase64String(png)).Append("\"/></svg>").ToString();
    }

    private string[] Usual()
    {
        string[] readings = [.. NumberColumns.Where(d => d.Role == ColumnRole.Reading).Take(4).Select(d => d.Name)];
        return readings.Length >= 2 ? readings : [.. readings.Concat(NumberColumns.Where(d => d.Role == ColumnRole.Attribute).Select(d => d.Name)).Take(4)];
    }

    private string? FirstCategory() => Categories
        .Where(d => d.Role == ColumnRole.Attribute && Content!.Column(d.Name) is CodedColumn { Levels.Length: >= 2 and <= 6 })
        .OrderBy(d => d.Kind == ColumnKind.YesNo).FirstOrDefault()?.Name;

    private static JsonElement? Element(double? value) => value is { } v ? JsonSerializer.SerializeToElement(v) : null;

    private sealed class Throttled(PairsState state, CancellationTokenSource stop) : IProgress<WorkProgress>
    {
        public void Report(WorkProgress value)
        {
            if (stop != state._stop)
                return;
            state.Progress = value;
            state.Changed?.Invoke();
        }
    }
}

/// <summary>What the address of the Pairs page says.</summary>
internal sealed record PairsAddress(IReadOnlyList<string> Readings, string? Colour, string? Among, double? Cut, bool WithFilled, bool Ignore, int? Revision)
{
    /// <summary>The query string of these settings; what is usual is left out.</summary>
    public string Query(string? slice)
    {
        var parts = Readings.Select(r => ("reading", r)).ToList();
        void Add(string name, string? value)
        {
            if (value is not null)
                parts.Add((name, value));
        }
        Add("colour", Colour);
        Add("among", Among);
        Add("cut", Cut is { } c and not 0.05 ? c.ToString("R", CultureInfo.InvariantCulture) : null);
        Add("filled", WithFilled ? "with" : null);
        Add("vehicles", Ignore ? "ignore" : null);
        Add("slice", slice);
        Add("revision", Revision?.ToString(CultureInfo.InvariantCulture));
        return parts.Count == 0 ? "" : "?" + string.Join('&', parts.Select(p => $"{p.Item1}={Uri.EscapeDataString(p.Item2)}"));
    }
}
