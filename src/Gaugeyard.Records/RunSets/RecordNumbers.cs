namespace Gaugeyard.Records.RunSets;

/// <summary>
/// The record number of each row. Numbers start at 1 in file order and are never reused, so they stay valid through
/// restores and appends; kept as runs of consecutive numbers.
/// </summary>
public sealed class RecordNumbers
{
    private readonly (int First, int Count)[] _runs;
    private readonly int[] _starts;

    public RecordNumbers(IEnumerable<(int First, int Count)> runs)
    {
        _runs = [.. runs.Where(r => r.Count > 0)];
        _starts = new int[_runs.Length];
        int last = 0;
        for (int i = 0; i < _runs.Length; i++)
        {
            if (_runs[i].First <= last)
                throw new ArgumentException($"record numbers must rise but run {i} starts at {_runs[i].First} after {last}");
            last = _runs[i].First + _runs[i].Count - 1;
            _starts[i] = Count;
            Count += _runs[i].Count;
        }
        Highest = last;
    }

    /// <summary>Numbers 1..count.</summary>
    public static RecordNumbers FromOne(int count) => new([(1, count)]);

    /// <summary>Number of rows.</summary>
    public int Count { get; }

    /// <summary>The highest number in use; 0 when empty.</summary>
    public int Highest { get; }

    /// <summary>Runs of consecutive numbers.</summary>
    public IReadOnlyList<(int First, int Count)> Runs => _runs;

    /// <summary>The record number at a row (0-based).</summary>
    public int this[int row]
    {
        get
        {
            int i = Array.BinarySearch(_starts, row);
            if (i < 0)
                i = ~i - 1;
            return _runs[i].First + row - _starts[i];
        }
    }

    /// <summary>The row of a record number, or -1 when the revision has no such record.</summary>
    public int RowOf(int record)
    {
        int low = 0, high = _runs.Length - 1;
        while (low <= high)
        {
            int mid = (low + high) / 2;
            var (first, count) = _runs[mid];
            if (record < first)
                high = mid - 1;
            else if (record >= first + count)
                low = mid + 1;
            else
                return _starts[mid] + record - first;
        }
        return -1;
    }

    /// <summary>These rows followed by count new ones numbered from first.</summary>
    public RecordNumbers Append(int first, int count) => new([.. _runs, (first, count)]);
}
