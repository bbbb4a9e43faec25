using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Portal.Components;
using Gaugeyard.Portal.Pages.Matrix;
using Gaugeyard.Portal.Plots;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Portal.Pages;

/// <summary>What stands off when several readings are seen together? Settings live in the address.</summary>
public sealed partial class Pairs : RunSetPage
{
    private static readonly (string Value, string Text)[] Shares = [("0.01", "1 in 100"), ("0.05", "1 in 20"), ("0.1", "1 in 10"), ("0.2", "1 in 5")];

    private Asking<StandoutsAnswer> _standouts = null!;
    private RevisionContent? _content;
    private IReadOnlyList<string> _readings = [];
    private string? _colour, _among, _problem, _done;
    private string _cut = "0.05";
    private MatrixPlot? _plot;
    private MatrixSelection? _selection;
    private IReadOnlyList<SliceCondition>? _slice;
    private int? _open;

    private PointsQuestion Points => new() { Revision = _content!.Revision, Slice = Desk.Slice, Readings = [.. _readings.Take(PointsQuestion.MostReadings)], Colour = _colour };

    protected override void OnInitialized()
    {
        _standouts = Question<StandoutsAnswer>();
        base.OnInitialized();
    }

    protected override async Task AskAsync()
    {
        if (_content?.RunSetId != Id || _content.Revision != RunSet!.Revision)
            _content = await Store.OpenAsync(Id, RunSet!.Revision);
        if (_content is null)
            return;
        _readings = [.. (Desk.Values("readings") ?? Usual()).Where(r => _content.Find(r)?.Kind == ColumnKind.Number).Distinct(StringComparer.Ordinal).Take(PointsQuestion.MostReadings)];
        _colour = Desk.Value("colour") is { } colour ? Known(colour) : FirstColour();
        _among = Known(Desk.Value("among"));
        _cut = Shares.Any(s => s.Value == Desk.Value("cut")) ? Desk.Value("cut")! : "0.05";
        (_selection, _problem) = (null, null);
        if (_readings.Count > 0)
            await _standouts.AskAsync(Id, new StandoutsQuestion
            {
                Revision = _content.Revision,
                Slice = Desk.Slice,
                Readings = _readings,
                Among = _among,
                Cut = double.Parse(_cut, System.Globalization.CultureInfo.InvariantCulture),
            }, _content.Revision);
    }

    private void Select(MatrixSelection selection)
    {
        _selection = selection;
        _slice = selection.Count == 0 ? null : Chosen.Slice(_content!, selection);
        _done = null;
    }

    private async Task<string?> SetAsideAsync(string reason)
    {
        if (_selection is null || Chosen.Records(_content!, Desk.Slice, _selection) is not { Count: > 0 } records)
            return "The selection cannot be named record by record. Choose it with a box or by range.";
        try
        {
            var info = await Store.CommitAsync(Id, _content!.Revision, RunSetEdits.SetAside(_content, [.. records.Select(r => new Exclusion(r, null, reason))]));
            _done = $"{Analysis.Wording.Say.Count(records.Count, "record")} set aside in revision {info.Revision}; the Ledger can bring the earlier revision back.";
            Desk.Took(info);
            return null;
        }
        catch (Exception e) when (e is EditException or StaleRevisionException)
        {
            return e.Message;
        }
    }

    private async Task<string?> PictureAsync() => _plot is not null && await _plot.PngAsync() is { } png ? Chosen.Picture(png) : null;

    private string? Known(string? category) => GroupColumns.Any(c => c.Value == category) ? category : null;

    /// <summary>The readings, then other numbers, four in all.</summary>
    private IEnumerable<string> Usual()
    {
        var numbers = _content!.Definitions.Where(d => d.Kind == ColumnKind.Number).ToArray();
        var readings = numbers.Where(d => d.Role == ColumnRole.Reading).ToArray();
        return readings.Concat(numbers.Where(d => d.Role == ColumnRole.Attribute)).Take(4).Select(d => d.Name);
    }

    private string? FirstColour() => RunSet!.Columns
        .Where(c => c.Definition is { Role: ColumnRole.Attribute, Kind: ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.YesNo } && c.Levels?.Count is >= 2 and <= 6)
        .OrderBy(c => c.Definition.Kind == ColumnKind.YesNo).FirstOrDefault()?.Definition.Name;
}
