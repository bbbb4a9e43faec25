using System.Globalization;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;

namespace Gaugeyard.Records.RunSets;

/// <summary>One corrected cell: the new value as text, number or true/false; null empties the cell.</summary>
public sealed record Correction(int Record, string Column, object? Value, string Reason);

/// <summary>A record, or one cell of it, to be left out of the analysis with a reason.</summary>
public sealed record Exclusion(int Record, string? Column, string Reason);

/// <summary>An accepted estimate for one missing cell, in the column's unit.</summary>
public sealed record FilledCell(int Record, double Value, double Low, double High, bool Overridden = false);

/// <summary>A change that cannot be made; the findings say what is wrong with which cell. Nothing was changed.</summary>
public sealed class EditException(string message, IReadOnlyList<Finding>? findings = null) : Exception(message)
{
    public IReadOnlyList<Finding> Findings { get; } = findings ?? [];
}

/// <summary>
/// Changes to a run set, each as a draft of its next revision made from one earlier one. Pure: nothing is written here, and
/// either all of a change holds or none of it.
/// </summary>
public static class RunSetEdits
{
    /// <summary>The first revision from columns that were read from a file.</summary>
    public static RevisionDraft Import(IReadOnlyList<Column> columns, string note) =>
        new(LedgerKinds.Import, columns, RecordNumbers.FromOne(columns.Count == 0 ? 0 : columns[0].Count)) { Note = note };

    /// <summary>Puts new values into cells; the earlier value stays in the mark and in the earlier revision.</summary>
    /// <exception cref="EditException">A record or column does not exist, a value does not fit its column, or a reason is missing.</exception>
    public static RevisionDraft Correct(RevisionContent content, IReadOnlyList<Correction> corrections)
    {
        if (corrections.Count == 0)
            throw new EditException("There is no correction in the list. Give at least one record, column, value and reason.");
        var findings = new List<Finding>();
        var columns = Columns(content);
        var marks = Marks(content);
        foreach (var byColumn in corrections.GroupBy(c => c.Column, StringComparer.Ordinal))
        {
            int at = IndexOf(content, byColumn.Key);
            if (at < 0)
            {
                findings.Add(new Finding(Severity.Error, byColumn.Key, byColumn.First().Record, $"There is no column called '{byColumn.Key}'."));
                continue;
            }
            var edit = new ColumnEdit(columns[at]);
            var columnMarks = marks[byColumn.Key] = new Dictionary<int, CellMark>(content.MarksOf(byColumn.Key));
            foreach (var c in byColumn)
            {
                int row = content.Numbers.RowOf(c.Record);
                if (row < 0)
                    findings.Add(new Finding(Severity.Error, c.Column, c.Record, $"There is no record {c.Record} in revision {content.Revision}."));
                else if (string.IsNullOrWhiteSpace(c.Reason))
                    findings.Add(new Finding(Severity.Error, c.Column, c.Record, $"Record {c.Record}, column {c.Column}: a correction needs a reason."));
                else if (!edit.TrySet(row, c.Value))
                    findings.Add(new Finding(Severity.Error, c.Column, c.Record, $"Record {c.Record}, column {c.Column}: '{c.Value}' is not {edit.Wanted}."));
                else
                    columnMarks[c.Record] = new CellMark(CellState.Corrected) { Reason = c.Reason, Original = columns[at].TextAt(row) ?? content.MarksOf(c.Column).GetValueOrDefault(c.Record)?.Original };
            }
            columns[at] = edit.Finish();
        }
        ThrowIfAny(findings, "Nothing was corrected");
        return Draft(content, LedgerKinds.Correction, columns, marks, content.SetAside) with
        {
            Note = corrections.Count == 1
                ? $"Record {corrections[0].Record}, {corrections[0].Column}: {corrections[0].Reason}"
                : $"{corrections.Count} cells corrected: {corrections[0].Reason}",
        };
    }

    /// <summary>Leaves records or cells out of every analysis, with a reason; nothing is deleted.</summary>
    /// <exception cref="EditException">A record or column does not exist, or a reason is missing.</exception>
    public static RevisionDraft SetAside(RevisionContent content, IReadOnlyList<Exclusion> exclusions)
    {
        if (exclusions.Count == 0)
            throw new EditException("There is no record in the list. Give at least one record and reason.");
        var findings = new List<Finding>();
        var marks = Marks(content);
        var setAside = new Dictionary<int, string>(content.SetAside);
        foreach (var e in exclusions)
        {
            int row = content.Numbers.RowOf(e.Record);
            if (row < 0)
                findings.Add(new Finding(Severity.Error, e.Column, e.Record, $"There is no record {e.Record} in revision {content.Revision}."));
            else if (string.IsNullOrWhiteSpace(e.Reason))
                findings.Add(new Finding(Severity.Error, e.Column, e.Record, $"Record {e.Record}: setting aside needs a reason."));
            else if (e.Column is null)
                setAside[e.Record] = e.Reason;
            else if (content.Find(e.Column) is null)
                findings.Add(new Finding(Severity.Error, e.Column, e.Record, $"There is no column called '{e.Column}'."));
            else
                Own(marks, content, e.Column)[e.Record] =
                    (content.MarksOf(e.Column).GetValueOrDefault(e.Record) ?? new CellMark(CellState.SetAside)) with { State = CellState.SetAside, Reason = e.Reason };
        }
        ThrowIfAny(findings, "Nothing was set aside");
        return Draft(content, LedgerKinds.SetAside, Columns(content), marks, setAside) with
        {
            Note = exclusions.Count == 1 ? $"Record {exclusions[0].Record}: {exclusions[0].Reason}" : $"{exclusions.Count} set aside: {exclusions[0].Reason}",
        };
    }

    /// <summary>Takes records, or single cells, back into the analysis.</summary>
    /// <exception cref="EditException">Something in the list is not set aside.</exception>
    public static RevisionDraft PutBack(RevisionContent content, IReadOnlyList<(int Record, string? Column)> back)
    {
        var findings = new List<Finding>();
        var marks = Marks(content);
        var setAside = new Dictionary<int, string>(content.SetAside);
        foreach (var (record, column) in back)
        {
            if (column is null ? setAside.Remove(record) : content.MarksOf(column).TryGetValue(record, out var mark) && mark.State == CellState.SetAside && Own(marks, content, column).Remove(record))
                continue;
            findings.Add(new Finding(Severity.Error, column, record, $"Record {record} is not set aside."));
        }
        ThrowIfAny(findings, "Nothing was put back");
        return Draft(content, LedgerKinds.PutBack, Columns(content), marks, setAside) with { Note = $"{back.Count} put back" };
    }

    /// <summary>Fills missing cells of a number column with accepted estimates.</summary>
    /// <exception cref="EditException">A cell is not missing, or an estimate lies outside its interval.</exception>
    public static RevisionDraft Fill(RevisionContent content, string column, IReadOnlyList<FilledCell> cells, string way, double confidence, string note)
    {
        int at = IndexOf(content, column);
        if (at < 0 || content.Column(column) is not NumberColumn number)
            throw new EditException($"'{column}' is not a number column of this run set.");
        var findings = new List<Finding>();
        var values = (double[])number.Values.Clone();
        var marks = Marks(content);
        var own = Own(marks, content, column);
        foreach (var cell in cells)
        {
            int row = content.Numbers.RowOf(cell.Record);
            if (row < 0)
                findings.Add(new Finding(Severity.Error, column, cell.Record, $"There is no record {cell.Record} in revision {content.Revision}."));
            else if (!double.IsNaN(values[row]) && own.GetValueOrDefault(cell.Record)?.State != CellState.Filled)
                findings.Add(new Finding(Severity.Error, column, cell.Record, $"Record {cell.Record}, column {column} has a measured value; an estimate never replaces it."));
            else if (!(cell.Low <= cell.Value && cell.Value <= cell.High) || !double.IsFinite(cell.Value))
                findings.Add(new Finding(Severity.Error, column, cell.Record, $"Record {cell.Record}: the estimate {cell.Value} does not lie between {cell.Low} and {cell.High}."));
            else
            {
                values[row] = cell.Value;
                own[cell.Record] = new CellMark(CellState.Filled) { Low = cell.Low, High = cell.High, Way = way, Confidence = confidence, Overridden = cell.Overridden, Original = own.GetValueOrDefault(cell.Record)?.Original };
            }
        }
        ThrowIfAny(findings, "Nothing was filled");
        var columns = Columns(content);
        columns[at] = new NumberColumn(number.Definition, values);
        return Draft(content, LedgerKinds.Fill, columns, marks, content.SetAside) with { Note = note };
    }

    /// <summary>Makes an earlier revision the latest one again, as a new revision.</summary>
    public static RevisionDraft Restore(RevisionContent earlier) =>
        Draft(earlier, LedgerKinds.Restore, Columns(earlier), Marks(earlier), earlier.SetAside) with { Note = $"Revision {earlier.Revision} restored" };

    /// <summary>Starts a draft that keeps everything of a revision.</summary>
    public static RevisionDraft Draft(RevisionContent content, string kind, IReadOnlyList<Column> columns, IReadOnlyDictionary<string, Dictionary<int, CellMark>> marks, IReadOnlyDictionary<int, string> setAside) =>
        new(kind, columns, content.Numbers)
        {
            Marks = marks.ToDictionary(m => m.Key, m => (IReadOnlyDictionary<int, CellMark>)m.Value, StringComparer.Ordinal),
            SetAside = setAside,
        };

    internal static Column[] Columns(RevisionContent content) => [.. content.Definitions.Select(d => content.Column(d.Name))];

    internal static Dictionary<string, Dictionary<int, CellMark>> Marks(RevisionContent content) =>
        content.Marks.ToDictionary(m => m.Key, m => new Dictionary<int, CellMark>(m.Value), StringComparer.Ordinal);

    internal static int IndexOf(RevisionContent content, string column) => content.Definitions.ToList().FindIndex(d => d.Name == column);

    private static Dictionary<int, CellMark> Own(Dictionary<string, Dictionary<int, CellMark>> marks, RevisionContent content, string column)
    {
        if (!marks.TryGetValue(column, out var own))
            marks[column] = own = new Dictionary<int, CellMark>(content.MarksOf(column));
        return own;
    }

    private static void ThrowIfAny(List<Finding> findings, string what)
    {
        if (findings.Count > 0)
            throw new EditException($"{what}: {findings[0].Text}{(findings.Count > 1 ? $" And {findings.Count - 1} more." : "")}", findings);
    }

    /// <summary>A column being changed cell by cell; the original is not touched.</summary>
    private sealed class ColumnEdit(Column column)
    {
        private readonly double[]? _values = (column as NumberColumn)?.Values.Clone() as double[];
        private readonly long[]? _ticks = (column as DateTimeColumn)?.Ticks.Clone() as long[];
        private readonly int[]? _codes = (column as CodedColumn)?.Codes.Clone() as int[];
        private readonly List<string>? _levels = (column as CodedColumn)?.Levels.ToList();

        public string Wanted => column.Definition.Kind switch
        {
            ColumnKind.Number => "a number",
            ColumnKind.DateTime => "a date such as 2031-04-03 or 2031-04-03T14:05",
            ColumnKind.YesNo => "yes or no",
            ColumnKind.OrderedCategory => $"one of {string.Join(", ", column.Definition.Levels ?? [])}",
            _ => "a text",
        };

        public bool TrySet(int row, object? value)
        {
            if (value is string { Length: 0 })
                value = null;
            if (value is int or long or decimal or float)
                value = Convert.ToDouble(value, CultureInfo.InvariantCulture);
            if (_values is not null)
            {
                if (value is null)
                    _values[row] = double.NaN;
                else if (value is double number && double.IsFinite(number))
                    _values[row] = number;
                else if (value is string text && double.TryParse(text.Trim().Replace('\u2212', '-'), NumberStyles.Float, CultureInfo.InvariantCulture, out double parsed) && double.IsFinite(parsed))
                    _values[row] = parsed;
                else
                    return false;
                return true;
            }
            if (_ticks is not null)
            {
                if (value is null)
                    _ticks[row] = DateTimeColumn.Missing;
                else if (value is DateTime at || (value is string text && DateTime.TryParse(text, CultureInfo.InvariantCulture, DateTimeStyles.None, out at)))
                    _ticks[row] = at.Ticks;
                else
                    return false;
                return true;
            }
            string? wanted = value switch
            {
                null => null,
                bool yes => yes ? "yes" : "no",
                double number => number.ToString("R", CultureInfo.InvariantCulture),
                _ => value.ToString(),
            };
            if (wanted is null)
            {
                _codes![row] = -1;
                return true;
            }
            int code = _levels!.IndexOf(wanted);
            if (code < 0)
            {
                if (column.Definition.Kind is ColumnKind.OrderedCategory or ColumnKind.YesNo)
                    return false;
                code = _levels.Count;
                _levels.Add(wanted);
            }
            _codes![row] = code;
            return true;
        }

        public Column Finish() =>
            _values is not null ? new NumberColumn(column.Definition, _values)
            : _ticks is not null ? new DateTimeColumn(column.Definition, _ticks)
            : new CodedColumn(column.Definition, [.. _levels!], _codes!);
    }
}
