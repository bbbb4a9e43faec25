using System.Globalization;
using Gaugeyard.Exchange.Detection;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Handover;

/// <summary>Puts the states of a handed-over table back onto its cells when it is read again.</summary>
internal static class HandoverReturn
{
    /// <summary>Stands for the heading of the record numbers, which no column of a run set can be called.</summary>
    public const string RecordColumn = "\u0001record";

    /// <summary>How a workbook's table must be read according to its own dictionary; what the user chooses goes before it.</summary>
    public static ReadChoices ChoicesOf(HandoverDictionary dictionary, ReadChoices user) => user with
    {
        Sheet = HandoverWorkbook.Records,
        HeaderRows = [1],
        UnitRow = 0,
        DecimalMark = '.',
        MissingCodes = user.MissingCodes ?? [],
        KeepSpellings = true,
        Columns = [new(RecordColumn) { Kind = ColumnKind.Number }, .. dictionary.Columns.Select(e => Merge(e.Definition, user.Columns.FirstOrDefault(c => c.Name == e.Definition.Name)))],
    };

    private static ColumnChoice Merge(ColumnDefinition definition, ColumnChoice? said) => new(definition.Name)
    {
        Kind = said?.Kind ?? definition.Kind,
        Role = said?.Role ?? definition.Role,
        Unit = said?.Unit ?? definition.Unit ?? "",
        Levels = said?.Levels ?? definition.Levels,
        MissingCodes = said?.MissingCodes,
        DecimalMark = said?.DecimalMark,
        DateOrder = said?.DateOrder ?? DateOrder.YearFirst,
    };

    /// <summary>Keeps the run set's columns, drops the record number and the companions, and lays the marks on the cells.</summary>
    /// <param name="readings">Columns of the sheet by sheet column, from 0; null where a column was not kept.</param>
    /// <param name="dictionary">What the workbook says.</param>
    /// <param name="user">What the user chooses.</param>
    /// <param name="setAside">Receives reasons by record number.</param>
    /// <param name="findings">Receives what was noticed.</param>
    public static List<ColumnReading> FromWorkbook(Func<int, ColumnReading?> readings, HandoverDictionary dictionary, ReadChoices user, Dictionary<int, string> setAside, List<Finding> findings)
    {
        var rowOf = new Dictionary<int, int>();
        if (readings(0)?.Column is NumberColumn numbers)
            for (int row = 0; row < numbers.Count; row++)
                if (numbers.Values[row] is >= 1 and < int.MaxValue)
                    rowOf.TryAdd((int)numbers.Values[row], row);
        var kept = new List<ColumnReading>();
        foreach (var entry in dictionary.Columns)
        {
            if (readings(entry.Value) is not { } reading)
                throw new UnreadableFileException($"the hand-over's sheet Records has no column for '{entry.Definition.Name}'; hand it over again.");
            var said = user.Columns.FirstOrDefault(c => c.Name == entry.Definition.Name);
            if (said is null || said is { Kind: null, Levels: null, MissingCodes: null })
                reading = reading.With(entry.Definition with { Role = said?.Role ?? entry.Definition.Role, Unit = said?.Unit ?? entry.Definition.Unit, Levels = entry.Definition.Levels }) with { Evidence = "As the hand-over says." };
            kept.Add(reading);
        }
        var byName = kept.ToDictionary(r => r.Column.Name, StringComparer.Ordinal);
        foreach (var state in dictionary.States)
        {
            if (!rowOf.TryGetValue(state.Record, out int row))
                continue;
            if (state.Column.Length == 0)
            {
                setAside[row + 1] = state.Mark.Reason ?? "";
                continue;
            }
            if (!byName.TryGetValue(state.Column, out var reading))
                continue;
            // a value typed over an estimate in the sheet is no estimate any more
            if (state.Mark.State == CellState.Filled && !Same(reading.Column.ValueAt(row), state.Value))
            {
                findings.Add(new Finding(Severity.Warning, state.Column, row + 1, $"record {row + 1}, column {state.Column}: the sheet's value is not the estimate that was handed over; it is read as measured"));
                continue;
            }
            if (state.Mark.State == CellState.Missing && !reading.Column.IsMissing(row))
                continue;
            reading.Marks[row + 1] = state.Mark;
        }
        return kept;
    }

    private static bool Same(object? now, object? then) => (now, then) switch
    {
        (double a, double b) => a.Equals(b),
        (DateTime a, DateTime b) => a == b,
        (bool a, string b) => a == (b == "yes"),
        (string a, string b) => a == b,
        (DateTime a, string b) => DateTime.TryParse(b, CultureInfo.InvariantCulture, out var parsed) && parsed == a,
        (null, null) => true,
        _ => false,
    };

    /// <summary>
    /// Recognises companion columns in a delimited table: "X state" beside a column X, holding nothing but names of states,
    /// with "X low" and "X high"; and "record state" with "record reason". Takes them out and lays the marks on the cells.
    /// </summary>
    public static void FromCompanions(List<ColumnReading> readings, Dictionary<int, string> setAside, List<Finding> findings)
    {
        var taken = new HashSet<ColumnReading>();
        int cells = 0, last = readings.Count;
        // companions follow their column at once, those of the whole record come last
        if (last >= 2 && Is(readings[last - 2], HandoverTable.RecordState) && Is(readings[last - 1], HandoverTable.RecordReason) && StatesOf(readings[last - 2]) is not null)
        {
            var (aside, reasons) = (readings[last - 2], readings[last - 1]);
            for (int row = 0; row < aside.Column.Count; row++)
                if (!aside.Column.IsMissing(row))
                    setAside[row + 1] = reasons.Column.TextAt(row) ?? "";
            taken.Add(aside);
            taken.Add(reasons);
            last -= 2;
        }
        for (int i = 0; i + 1 < last; i++)
        {
            var reading = readings[i];
            if (!Is(readings[i + 1], reading.Column.Name + " state") || StatesOf(readings[i + 1]) is not { } words)
                continue;
            var coded = (CodedColumn)readings[i + 1].Column;
            taken.Add(readings[i + 1]);
            NumberColumn? low = null, high = null;
            if (i + 3 < last && Is(readings[i + 2], reading.Column.Name + " low") && Is(readings[i + 3], reading.Column.Name + " high"))
            {
                low = readings[i + 2].Column as NumberColumn;
                high = readings[i + 3].Column as NumberColumn;
                taken.Add(readings[i + 2]);
                taken.Add(readings[i + 3]);
            }
            for (int row = 0; row < coded.Count; row++)
            {
                if (coded.Codes[row] < 0)
                    continue;
                var said = words[coded.Codes[row]];
                if (said is CellState.Measured or CellState.Missing || said == CellState.Filled && reading.Column.IsMissing(row))
                    continue;
                cells++;
                reading.Marks[row + 1] = new CellMark(said)
                {
                    Low = said == CellState.Filled && low is not null && !low.IsMissing(row) ? low.Values[row] : null,
                    High = said == CellState.Filled && high is not null && !high.IsMissing(row) ? high.Values[row] : null,
                };
            }
            i += low is null ? 1 : 3;
        }
        if (taken.Count == 0)
            return;
        readings.RemoveAll(taken.Contains);
        findings.Add(new Finding(Severity.Note, null, null, $"the file is a hand-over: {taken.Count} companion columns are read as the states of {cells:N0} cells{(setAside.Count > 0 ? $" and {setAside.Count:N0} set-aside records" : "")}"));
    }

    // the name, or the name with the number that made it distinct
    private static bool Is(ColumnReading reading, string name) =>
        reading.Column.Name == name || reading.Column.Name.StartsWith(name + " ", StringComparison.Ordinal) && int.TryParse(reading.Column.Name.AsSpan(name.Length + 1), NumberStyles.None, CultureInfo.InvariantCulture, out _);

    // the levels as states; null when the column holds anything else, or nothing that is worth saying
    private static CellState[]? StatesOf(ColumnReading reading)
    {
        if (reading.Column is not CodedColumn coded || coded.Levels.Length == 0)
            return null;
        var states = coded.Levels.Select(HandoverTable.Parse<CellState>).ToArray();
        return states.All(s => s is not null) && states.Any(s => s is CellState.Filled or CellState.Corrected or CellState.SetAside) ? [.. states.Select(s => s!.Value)] : null;
    }
}
