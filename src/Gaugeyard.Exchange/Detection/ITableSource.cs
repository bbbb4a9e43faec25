namespace Gaugeyard.Exchange.Detection;

/// <summary>A table inside a file, readable from the start as often as needed.</summary>
internal interface ITableSource : IDisposable
{
    /// <summary>The first rows that are not blank.</summary>
    IReadOnlyList<HeadRow> Head { get; }

    /// <summary>Merged cells as (row, first column, last column) where a workbook has them.</summary>
    IReadOnlyList<(int Row, int From, int To)> Merged { get; }

    /// <summary>Decimal mark to expect where a column does not show its own.</summary>
    char UsualDecimalMark { get; }

    /// <summary>Reads the records into columns.</summary>
    /// <param name="plan">Where they are and how columns are set up.</param>
    /// <param name="atMost">Stop after so many records; null for all.</param>
    /// <param name="progress">Receives the share done.</param>
    /// <param name="cancellationToken">Stops the reading.</param>
    RawTable Read(ReadPlan plan, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken);
}

/// <summary>How records are to be read.</summary>
/// <param name="Layout">Where they are.</param>
/// <param name="Columns">Text-only flag and decimal mark by column.</param>
/// <param name="Limits">Bounds.</param>
internal sealed record ReadPlan(Layout Layout, IReadOnlyList<(bool AsText, char DecimalMark)> Columns, ReadLimits Limits)
{
    public (bool AsText, char DecimalMark) Of(int column) => column < Columns.Count ? Columns[column] : (false, Columns.Count == 0 ? '.' : Columns[0].DecimalMark);
}

/// <summary>Columns as they stand in the file.</summary>
/// <param name="Columns">Columns of equal length.</param>
/// <param name="Rows">Row of the file by record.</param>
/// <param name="Ended">Whether the end of the file was reached.</param>
/// <param name="ShareRead">Share of the file that was read.</param>
/// <param name="Repeats">Rows that repeat the names.</param>
/// <param name="Ragged">First row with more cells than names, or 0, and how many such rows.</param>
/// <param name="Short">First record with fewer cells than names, or 0, and how many.</param>
internal sealed record RawTable(List<RawColumn> Columns, RowMap Rows, bool Ended, double ShareRead, IReadOnlyList<int> Repeats, (int First, int Count) Ragged, (int First, int Count) Short)
{
    public int Count => Rows.Count;

    /// <summary>First row that holds separators only, or 0, and how many.</summary>
    public (int First, int Count) Blank { get; init; }
}

/// <summary>Which row of the file each record stands in, kept as runs.</summary>
internal sealed class RowMap
{
    private readonly List<(int Record, int Row)> _runs = [];
    private int _next = int.MinValue;

    public int Count { get; private set; }

    public void Add(int row)
    {
        if (row != _next)
            _runs.Add((Count, row));
        _next = row + 1;
        Count++;
    }

    public void Append(RowMap other, int offset)
    {
        foreach (var (record, row) in other._runs)
            _runs.Add((Count + record, row + offset));
        Count += other.Count;
        _next = int.MinValue;
    }

    public void Truncate(int count) => Count = Math.Min(Count, count);

    /// <summary>Row of the record at an index from 0.</summary>
    public int this[int record]
    {
        get
        {
            int low = 0, high = _runs.Count - 1;
            while (low < high)
            {
                int middle = (low + high + 1) / 2;
                if (_runs[middle].Record <= record)
                    low = middle;
                else
                    high = middle - 1;
            }
            return _runs[low].Row + record - _runs[low].Record;
        }
    }
}
