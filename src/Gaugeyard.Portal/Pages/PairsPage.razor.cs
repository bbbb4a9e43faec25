using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Portal.Pages.Matrix;
using Gaugeyard.Portal.Plots;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Microsoft.AspNetCore.Components;

namespace Gaugeyard.Portal.Pages;

/// <summary>What stands off when several readings are seen together? Settings live in the address.</summary>
public sealed partial class PairsPage : ComponentBase, IDisposable
{
    private PairsState _state = null!;
    private MatrixPlot? _plot;
    private string? _problem;
    private IReadOnlyList<SliceCondition>? _conditions;
    private string? _asked;

    [Parameter]
    public string Id { get; set; } = "";

    [SupplyParameterFromQuery(Name = "reading")]
    private string[]? Readings { get; set; }

    [SupplyParameterFromQuery(Name = "colour")]
    private string? Colour { get; set; }

    [SupplyParameterFromQuery(Name = "among")]
    private string? Among { get; set; }

    [SupplyParameterFromQuery(Name = "cut")]
    private double? Cut { get; set; }

    [SupplyParameterFromQuery(Name = "filled")]
    private string? Filled { get; set; }

    [SupplyParameterFromQuery(Name = "vehicles")]
    private string? Vehicles { get; set; }

    [SupplyParameterFromQuery(Name = "slice")]
    private string? Slice { get; set; }

    [SupplyParameterFromQuery(Name = "revision")]
    private int? Revision { get; set; }

    [Inject]
    private Answerer Answerer { get; set; } = null!;

    [Inject]
    private IRunSetStore Store { get; set; } = null!;

    [Inject]
    private NavigationManager Navigation { get; set; } = null!;

    private string Path => $"/run-sets/{Id}/pairs";

    private PairsAddress Address => new(Readings ?? [], Colour, Among, Cut, Filled == "with", Vehicles == "ignore", Revision);

    protected override void OnInitialized()
    {
        _state = new PairsState(Answerer, Store);
        _state.Changed += Redraw;
    }

    protected override async Task OnParametersSetAsync()
    {
        string asked = Id + Address.Query(Slice);
        if (asked == _asked)
            return;
        _asked = asked;
        _conditions = null;
        await _state.OpenAsync(Id, Address, await SliceAsync());
    }

    public void Dispose()
    {
        _state.Changed -= Redraw;
        _state.Dispose();
    }

    private void Redraw() => _ = InvokeAsync(StateHasChanged);

    private async Task<IReadOnlyList<SliceCondition>> SliceAsync() =>
        string.IsNullOrEmpty(Slice) ? [] : (await Store.SlicesAsync(Id)).FirstOrDefault(s => s.Name == Slice)?.Conditions ?? [];

    private void Go(PairsAddress address) => Navigation.NavigateTo(Path + address.Query(Slice));

    private void ChooseReading(string name, bool wanted)
    {
        var readings = _state.Question.Readings;
        string[] next = wanted ? [.. readings, name] : [.. readings.Where(r => r != name)];
        if (next.Length > 0)
            Go(Address with { Readings = next });
    }

    private void Select(MatrixSelection selection)
    {
        _state.Selection = selection;
        _conditions = selection.Count == 0 ? null : _state.Conditions(selection);
    }

    private async Task<string?> SetAsideAsync(string reason)
    {
        if (_state.Selection is not { } selection || _state.RecordsOf(selection) is not { Count: > 0 } records)
            return "The selection cannot be named record by record. Choose it with a box or by range.";
        if (await _state.SetAsideAsync(records, reason) is { } problem)
            return problem;
        await _state.OpenAsync(Id, Address, await SliceAsync());
        return null;
    }

    private async Task PinAsync()
    {
        if (_state.Answer is { } answer)
            await _state.PinAsync(Path + (Address with { Revision = _state.Content!.Revision }).Query(Slice), BasisLine(answer), _plot is null ? null : await _plot.PngAsync());
    }

    private static string BasisLine(StandoutsAnswer answer) =>
        answer.Basis.Vehicles is { } vehicles && vehicles < answer.Basis.Records
            ? $"{answer.Basis.Records:N0} runs of {vehicles:N0} vehicles"
            : $"{answer.Basis.Records:N0} records";
}
