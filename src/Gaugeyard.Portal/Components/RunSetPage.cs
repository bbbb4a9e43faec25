using Gaugeyard.Analysis;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Portal.Layout;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;
using Microsoft.AspNetCore.Components;

namespace Gaugeyard.Portal.Components;

/// <summary>
/// A page of one run set. Its settings are the address's query; <see cref="AskAsync"/> is called whenever address or revision
/// changed, to put the questions that follow from them.
/// </summary>
public abstract class RunSetPage : ComponentBase, IDisposable
{
    private readonly List<IDisposable> _askings = [];
    private int? _revision;
    private string _address = "";
    private bool _gone;

    /// <summary>Run set of the address.</summary>
    [Parameter] public string Id { get; set; } = "";

    [Inject] protected Desk Desk { get; set; } = default!;

    [Inject] private NavigationManager Navigation { get; set; } = default!;

    [Inject] protected Answerer Answerer { get; set; } = default!;

    [Inject] protected IRunSetStore Store { get; set; } = default!;

    /// <summary>The run set, once loaded.</summary>
    protected RunSetInfo? RunSet => Desk.RunSet;

    /// <summary>Whether there is no such run set.</summary>
    protected bool Missing { get; private set; }

    /// <summary>Puts the page's questions.</summary>
    protected abstract Task AskAsync();

    /// <summary>A question of this page.</summary>
    protected Asking<TAnswer> Question<TAnswer>()
        where TAnswer : Answer
    {
        var asking = new Asking<TAnswer>(Answerer, () =>
        {
            if (!_gone)
                _ = InvokeAsync(StateHasChanged);
        });
        _askings.Add(asking);
        return asking;
    }

    protected override void OnInitialized() => Desk.Changed += DeskChanged;

    protected override async Task OnParametersSetAsync()
    {
        Missing = await Desk.LoadAsync() is null;
        (_revision, _address) = (RunSet?.Revision, Navigation.Uri);
        // the first, static rendering shows the frame at once; questions are put when the window is live
        if (!Missing && RendererInfo.IsInteractive)
            await AskAsync();
    }

    private void DeskChanged()
    {
        // a change of the query alone sets no parameter of the page, so the address is watched; another path is another page
        string address = Navigation.Uri;
        if (_gone || RunSet is null || _address.Length == 0 || (RunSet.Revision == _revision && address == _address) || new Uri(address).AbsolutePath != new Uri(_address).AbsolutePath)
            return;
        (_revision, _address) = (RunSet.Revision, address);
        _ = InvokeAsync(async () =>
        {
            await AskAsync();
            StateHasChanged();
        });
    }

    /// <summary>Columns of some kinds as options, readings first.</summary>
    protected IReadOnlyList<(string Value, string Text)> Columns(Func<ColumnSummary, bool> which) =>
        [.. (RunSet?.Columns ?? []).Where(which).OrderBy(c => c.Definition.Role != ColumnRole.Reading ? 2 : Unit.Find(c.Definition.Unit)?.Family is UnitFamily.Consumption or UnitFamily.Economy ? 0 : 1).Select(c => (c.Definition.Name, c.Definition.Name))];

    /// <summary>Number columns.</summary>
    protected IReadOnlyList<(string Value, string Text)> NumberColumns => Columns(c => c.Definition.Kind == ColumnKind.Number);

    /// <summary>Columns that make groups: categories of a bearable number of levels.</summary>
    protected IReadOnlyList<(string Value, string Text)> GroupColumns =>
        [.. (RunSet?.Columns ?? []).Where(c => c.Definition.Kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.YesNo && c.Definition.Role is not ColumnRole.RunName && c.Levels?.Count is > 1)
            .OrderBy(c => c.Definition.Role == ColumnRole.Vehicle ? 1 : 0).Select(c => (c.Definition.Name, c.Definition.Name))];

    /// <summary>The first consumption or economy reading, else the first reading, else the first number column; null when there is none.</summary>
    protected string? FirstReading => Best(RunSet)?.Definition.Name;

    private static ColumnSummary? Best(RunSetInfo? set)
    {
        var numbers = set?.Columns.Where(c => c.Definition.Kind == ColumnKind.Number).ToList() ?? [];
        return numbers.Find(c => c.Definition.Role == ColumnRole.Reading && Unit.Find(c.Definition.Unit)?.Family is UnitFamily.Consumption or UnitFamily.Economy)
            ?? numbers.Find(c => c.Definition.Role == ColumnRole.Reading) ?? numbers.FirstOrDefault();
    }

    /// <summary>Unit of a column for people.</summary>
    protected string UnitOf(string? column) => Unit.LabelOf(RunSet?.Columns.FirstOrDefault(c => c.Definition.Name == column)?.Definition.Unit);

    /// <summary>Unit code of a column.</summary>
    protected string? UnitCode(string? column) => RunSet?.Columns.FirstOrDefault(c => c.Definition.Name == column)?.Definition.Unit;

    public void Dispose()
    {
        _gone = true;
        Desk.Changed -= DeskChanged;
        foreach (var asking in _askings)
            asking.Dispose();
        GC.SuppressFinalize(this);
    }
}
