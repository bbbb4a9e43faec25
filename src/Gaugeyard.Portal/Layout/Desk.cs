using System.Text.Json;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Microsoft.AspNetCore.Components;
using Microsoft.AspNetCore.Components.Routing;
using Microsoft.AspNetCore.WebUtilities;

namespace Gaugeyard.Portal.Layout;

/// <summary>
/// What one window has in front of it: the run set of its address, its slice, and news of writes elsewhere. One per circuit.
/// </summary>
public sealed class Desk : IDisposable
{
    private readonly IRunSetStore _store;
    private readonly NavigationManager _navigation;

    public Desk(IRunSetStore store, NavigationManager navigation)
    {
        (_store, _navigation) = (store, navigation);
        store.Committed += Written;
        navigation.LocationChanged += Moved;
    }

    /// <summary>The run set in front, at its latest revision; null on pages without one.</summary>
    public RunSetInfo? RunSet { get; private set; }

    /// <summary>Revision that somebody else made while this window looked at an earlier one; null when there is none.</summary>
    public int? Newer { get; private set; }

    /// <summary>Raised when anything here changed.</summary>
    public event Action? Changed;

    /// <summary>Id of the run set in the address, or null.</summary>
    public string? Id => Segments is ["sets", var id, ..] ? id : null;

    /// <summary>Name of the page in the address, or null.</summary>
    public string? Page => Segments is ["sets", _, var page, ..] ? page : null;

    /// <summary>Conditions of the active slice, from the address.</summary>
    public IReadOnlyList<SliceCondition> Slice
    {
        get
        {
            if (Value("slice") is not { Length: > 0 } text)
                return [];
            try
            {
                return JsonSerializer.Deserialize<List<SliceCondition>>(text, WireFormat.Json) ?? [];
            }
            catch (JsonException)
            {
                return [];
            }
        }
    }

    private string[] Segments => new Uri(_navigation.Uri).AbsolutePath.Split('/', StringSplitOptions.RemoveEmptyEntries);

    /// <summary>A value of the address's query, or null.</summary>
    public string? Value(string name) => QueryHelpers.ParseQuery(new Uri(_navigation.Uri).Query).TryGetValue(name, out var v) ? v.ToString() : null;

    /// <summary>Values of a list in the address's query; null when it is not there.</summary>
    public IReadOnlyList<string>? Values(string name) => Value(name) is { } v ? v.Length == 0 ? [] : [.. v.Split('|')] : null;

    /// <summary>Changes settings in the address; null takes one out.</summary>
    public void Set(params (string Name, string? Value)[] changes)
    {
        var query = QueryHelpers.ParseQuery(new Uri(_navigation.Uri).Query).ToDictionary(q => q.Key, q => (string?)q.Value.ToString());
        foreach (var (name, value) in changes)
            query[name] = value;
        string path = new Uri(_navigation.Uri).AbsolutePath;
        _navigation.NavigateTo(QueryHelpers.AddQueryString(path, query.Where(q => q.Value is not null)), replace: true);
    }

    /// <summary>Sets the active slice.</summary>
    public void SetSlice(IReadOnlyList<SliceCondition> conditions) =>
        Set(("slice", conditions.Count == 0 ? null : JsonSerializer.Serialize(conditions, WireFormat.Json)));

    /// <summary>Address of another page of the run set with the same slice.</summary>
    public string Address(string page) => $"/sets/{Id}/{page}" + (Value("slice") is { Length: > 0 } slice ? "?slice=" + Uri.EscapeDataString(slice) : "");

    /// <summary>Loads the run set of the address when it is not at hand.</summary>
    public async Task<RunSetInfo?> LoadAsync(bool again = false, CancellationToken cancel = default)
    {
        string? id = Id;
        if (id is null)
            RunSet = null;
        else if (again || RunSet?.Id != id)
        {
            RunSet = await _store.FindAsync(id, null, cancel);
            Newer = null;
            Changed?.Invoke();
        }
        return RunSet;
    }

    /// <summary>Takes over the outcome of a write of this window.</summary>
    public void Took(RunSetInfo info)
    {
        RunSet = info;
        Newer = null;
        Changed?.Invoke();
    }

    public void Dispose()
    {
        _store.Committed -= Written;
        _navigation.LocationChanged -= Moved;
    }

    private void Moved(object? sender, LocationChangedEventArgs e) => Changed?.Invoke();

    private void Written(string id, int revision)
    {
        if (RunSet?.Id != id || revision <= RunSet.Revision)
            return;
        Newer = revision;
        Changed?.Invoke();
    }
}
