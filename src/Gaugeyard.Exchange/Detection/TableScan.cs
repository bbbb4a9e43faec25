using Gaugeyard.Exchange.Handover;
using Gaugeyard.Exchange.Spreadsheets;
using Gaugeyard.Exchange.Text;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>The whole way from bytes to typed columns.</summary>
internal static class TableScan
{
    public static ImportedTable Run(string path, string fileName, ReadChoices choices, ReadLimits limits, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken)
    {
        try
        {
            using var file = ArrivingFile.Recognise(path, fileName, limits, cancellationToken);
            return Run(file, fileName, choices, limits, atMost, progress, cancellationToken);
        }
        catch (Exception e) when (e is not (UnreadableFileException or OperationCanceledException))
        {
            if (e is AggregateException { InnerException: UnreadableFileException or OperationCanceledException } several)
                throw several.InnerException!;
            string name = Blanks.OneLine(fileName, 80);
            throw new UnreadableFileException(e is IOException or UnauthorizedAccessException
                ? $"{name} could not be read from the disk. Try the upload again."
                : $"{name} is cut off or damaged and cannot be read. Copy or export it again, or save it as CSV.", e);
        }
    }

    private static ImportedTable Run(ArrivingFile file, string fileName, ReadChoices choices, ReadLimits limits, int? atMost, IProgress<double>? progress, CancellationToken cancellationToken)
    {
        var findings = new List<Finding>();
        using ITableSource source = file.Sort == FileSort.Workbook ? new WorkbookTable(file, choices, limits, cancellationToken) : new TextTable(file, choices, limits);
        var workbook = source as WorkbookTable;
        var text = source as TextTable;
        WrongExtension(fileName, file, findings);
        if (text is { MixedLineEnds: true })
            findings.Add(new Finding(Severity.Note, null, null, "the file mixes line ends (CRLF and LF); both are read as line ends"));
        if (source.Head.Count == 0)
            throw new UnreadableFileException($"{file.Name} is empty: it has no line with text. Export it again and upload the new file.");

        var user = choices;
        var dictionary = workbook is null ? null : HandoverDictionary.TryRead(file, workbook.Sheets, choices.Sheet, cancellationToken);
        if (dictionary is not null && workbook!.Sheet != HandoverWorkbook.Records)
            dictionary = null;
        if (dictionary is not null)
            choices = HandoverReturn.ChoicesOf(dictionary, user);
        var layout = Layout.Find(source.Head, choices, source.Merged);
        if (text is not null)
            layout = layout with { Names = [.. layout.Names.Select(FormulaText.Undo)] };
        // the number of the record is no column of the run set, and must not take a name from one
        if (dictionary is not null)
            layout.Names[0] = HandoverReturn.RecordColumn;
        foreach (var entry in dictionary?.Columns ?? [])
            if (entry.Value < layout.Names.Length)
                layout.Names[entry.Value] = entry.Definition.Name;
        if (layout.Names.Length > limits.Columns)
            throw new UnreadableFileException($"{file.Name} has {layout.Names.Length:N0} columns; at most {limits.Columns:N0} are taken. Check the separator, or leave out columns that are not needed.");

        var setups = ColumnSetups(source, layout, choices);
        var raw = source.Read(new ReadPlan(layout, setups, limits), atMost, progress, cancellationToken);
        if (raw.Count == 0)
            throw HeaderOnly(file, layout);
        int written = raw.Columns.Count;
        var leftOut = layout.Above.Select(r => new LeftOutRow(r.Number, r.Text, "above the names")).ToList();
        leftOut.AddRange(raw.Repeats.Select(row => new LeftOutRow(row, string.Join(" | ", layout.Names.Take(5)), "repeats the names")));
        if (raw.Repeats.Count > 0)
            findings.Add(new Finding(Severity.Note, null, null, $"row {raw.Repeats[0]} repeats the column names{(raw.Repeats.Count > 1 ? $", like {raw.Repeats.Count - 1} more" : "")}; left out"));
        if (raw.Ended && dictionary is null)
            Totals.CutOff(raw, leftOut, findings);
        if (raw.Count == 0)
            throw HeaderOnly(file, layout);
        ReportShape(raw, layout, findings);
        if (workbook is { HiddenRows: > 0 })
            findings.Add(new Finding(Severity.Warning, null, null, $"sheet '{workbook.Sheet}' hides {workbook.HiddenRows:N0} rows; they are read like the others"));

        if (workbook?.Formulas is { Calculated: > 0 } formulas)
            findings.Add(new Finding(Severity.Warning, null, null, $"{formulas.Calculated:N0} formulas of the workbook stand without a stored result; they were calculated while reading, check their values"));
        if (workbook?.Formulas is { Failed: > 0 } failed)
            findings.Add(new Finding(Severity.Warning, null, null, $"{failed.Failed:N0} formulas of the workbook stand without a stored result and could not be calculated; their cells are missing. Open the workbook in a spreadsheet program, save it and read it again"));

        // a column without name and without any value is only ruled space
        var kept = Enumerable.Range(0, written).Where(c => c < layout.Names.Length && layout.Names[c].Length > 0 || HasValue(raw.Columns[c])).ToList();
        bool noHeader = layout.HeaderRows.Count == 0;
        if (noHeader)
            findings.Add(new Finding(Severity.Warning, null, null, "the file has no row of column names; the columns are called 'Column 1', 'Column 2' and so on"));
        string[] names = Names.Distinct([.. kept.Select(c => c < layout.Names.Length ? layout.Names[c] : "")], kept.Count, noHeader, findings);
        var choiceOf = ChoicesByName(choices, names, findings);

        object Judge(int k, RawColumn column) => ColumnReader.Judge(
            new ColumnQuestion(names[k], kept[k] < layout.Units.Length ? layout.Units[kept[k]] : "", choiceOf[k], choices, source.UsualDecimalMark, workbook?.From1904 ?? false) { Guarded = text is not null, Exact = dictionary is not null }, column, raw.Rows);
        var judged = new object[kept.Count];
        Parallel.For(0, kept.Count, new ParallelOptions { CancellationToken = cancellationToken }, k => judged[k] = Judge(k, raw.Columns[kept[k]]));
        for (int round = 0; round < 3 && judged.Any(j => j is ReadAgain); round++)
        {
            var again = setups.ToList();
            for (int k = 0; k < kept.Count; k++)
                if (judged[k] is ReadAgain wanted)
                {
                    while (again.Count <= kept[k])
                        again.Add((false, source.UsualDecimalMark));
                    again[kept[k]] = (wanted.AsText, wanted.DecimalMark);
                }
            setups = again;
            var second = source.Read(new ReadPlan(layout, setups, limits), atMost, null, cancellationToken);
            for (int k = 0; k < kept.Count; k++)
                if (judged[k] is ReadAgain)
                {
                    second.Columns[kept[k]].Truncate(raw.Count);
                    judged[k] = Judge(k, second.Columns[kept[k]]);
                }
        }
        var readings = judged.Select(j => (ColumnReading)j).ToList();

        var doubts = new List<Doubt>(readings.SelectMany(r => r.Doubts));
        var setAside = new Dictionary<int, string>();
        if (dictionary is not null)
        {
            readings = HandoverReturn.FromWorkbook(c => kept.IndexOf(c) is >= 0 and var k ? readings[k] : null, dictionary, user, setAside, findings);
            choiceOf = [.. readings.Select(r => choices.Columns.First(c => c.Name == r.Column.Name))];
        }
        else if (text is not null)
        {
            HandoverReturn.FromCompanions(readings, setAside, findings);
            if (readings.Count < choiceOf.Length)
                choiceOf = [.. readings.Select(r => choiceOf[Array.IndexOf(names, r.Column.Name)])];
        }
        FileCodes.Apply(readings, choiceOf, choices, layout.Above, raw.Rows);
        if (dictionary is null)
            Gallons.Settle(readings, doubts, findings);
        Roles.Guess(readings, choiceOf);
        findings.AddRange(readings.SelectMany(r => r.Findings));

        long records = raw.Ended ? raw.Count : (long)Math.Max(raw.Count, Math.Round(raw.Count / Math.Max(1e-9, raw.ShareRead)));
        var reading = new ReadPreview
        {
            What = text?.What ?? workbook!.What,
            IsWorkbook = workbook is not null,
            Encoding = text?.EncodingName,
            Delimiter = text?.Delimiter,
            Sheets = workbook?.Sheets ?? [],
            Sheet = workbook?.Sheet,
            Range = choices.Range,
            DecimalMark = choices.DecimalMark ?? source.UsualDecimalMark,
            ThousandsMark = choices.ThousandsMark,
            HeaderRows = layout.HeaderRows,
            UnitRow = layout.UnitRow,
            LeftOut = leftOut,
            MissingCodes = [.. readings.SelectMany(r => r.Column.Definition.MissingCodes).Distinct().Order(StringComparer.Ordinal)],
            Columns = [.. readings.Select(Preview)],
            Doubts = doubts,
            Findings = findings,
            Records = records,
            OnlyBeginning = !raw.Ended,
            IsHandover = dictionary is not null,
        };
        progress?.Report(1);
        return new ImportedTable(
            [.. readings.Select(r => r.Column)],
            readings.Where(r => r.Marks.Count > 0).ToDictionary(r => r.Column.Name, r => (IReadOnlyDictionary<int, CellMark>)r.Marks, StringComparer.Ordinal),
            setAside,
            findings,
            reading)
        { ReadAs = Resolved(reading, choices) };
    }

    // what was detected, written as choices: the ledger keeps it
    private static ReadChoices Resolved(ReadPreview reading, ReadChoices choices) => choices with
    {
        Sheet = reading.Sheet,
        HeaderRows = reading.HeaderRows,
        UnitRow = reading.UnitRow ?? 0,
        Delimiter = reading.Delimiter,
        Encoding = reading.Encoding,
        DecimalMark = choices.DecimalMark,
    };

    private static ColumnPreview Preview(ColumnReading reading)
    {
        var coded = reading.Column as CodedColumn;
        bool listed = reading.Column.Definition.Kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.YesNo;
        return new ColumnPreview(
            reading.Column.Definition,
            reading.Known,
            reading.Column.Count - reading.Known,
            listed ? [.. coded!.Levels.Take(200)] : null,
            coded?.Levels.Length ?? 0,
            reading.FirstValues,
            reading.Evidence);
    }

    private static List<(bool, char)> ColumnSetups(ITableSource source, Layout layout, ReadChoices choices)
    {
        var setups = new List<(bool, char)>();
        var data = source.Head.Where(r => r.Number >= layout.FirstDataRow).ToList();
        for (int c = 0; c < layout.Names.Length; c++)
        {
            string name = layout.Names[c];
            var choice = choices.Columns.FirstOrDefault(x => x.Name == name);
            char mark = choice?.DecimalMark ?? choices.DecimalMark
                ?? DecimalMarks.OfColumn(data.Select(r => (r.At(c + layout.FirstColumn), 1)), source.UsualDecimalMark);
            bool asText = choice?.Kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.Text;
            setups.Add((asText, mark));
        }
        return setups;
    }

    private static ColumnChoice?[] ChoicesByName(ReadChoices choices, string[] names, List<Finding> findings)
    {
        var found = new ColumnChoice?[names.Length];
        foreach (var choice in choices.Columns)
        {
            int k = Array.IndexOf(names, choice.Name);
            if (k < 0)
                k = Array.FindIndex(names, n => n.Equals(choice.Name.Trim(), StringComparison.OrdinalIgnoreCase));
            if (k < 0)
                findings.Add(new Finding(Severity.Warning, null, null, $"a choice is given for a column '{Blanks.OneLine(choice.Name)}', but the file has no column of that name"));
            else
                found[k] = choice;
        }
        return found;
    }

    private static bool HasValue(RawColumn column)
    {
        if (column.Numbers > 0)
            return true;
        for (int i = 1; i < column.Texts.Count; i++)
            if (column.Counts[i] > 0 && !string.IsNullOrWhiteSpace(column.Texts[i]))
                return true;
        return false;
    }

    private static UnreadableFileException HeaderOnly(ArrivingFile file, Layout layout) =>
        new($"{file.Name} has column names ({Blanks.OneLine(string.Join(", ", layout.Names.Where(n => n.Length > 0)), 80)}) but no record below them. Add the runs, or check which row holds the names.");

    private static void WrongExtension(string fileName, ArrivingFile file, List<Finding> findings)
    {
        string extension = Path.GetExtension(fileName).ToLowerInvariant();
        bool sheetName = extension is ".xlsx" or ".xls" or ".xlsm";
        if (file.Sort == FileSort.Text && sheetName)
            findings.Add(new Finding(Severity.Warning, null, null, $"{file.Name} is called {extension} but holds plain text; it is read as text"));
        else if (file.Sort == FileSort.Workbook && file.Wrapping.Length == 0 && !sheetName && extension.Length > 0)
            findings.Add(new Finding(Severity.Warning, null, null, $"{file.Name} is called {extension} but is a workbook; it is read as one"));
    }

    private static void ReportShape(RawTable raw, Layout layout, List<Finding> findings)
    {
        if (raw.Blank.Count > 0)
            findings.Add(new Finding(Severity.Note, null, null, $"row {raw.Blank.First} has separators but no value{(raw.Blank.Count > 1 ? $", like {raw.Blank.Count - 1:N0} more rows" : "")}; left out"));
        if (raw.Ragged.Count > 0)
            findings.Add(new Finding(Severity.Warning, null, null, $"row {raw.Ragged.First} has more cells than there are names ({layout.Names.Length}){(raw.Ragged.Count > 1 ? $", and so have others" : "")}; the extra cells stand in columns of their own"));
        if (raw.Short.Count > 0)
            findings.Add(new Finding(Severity.Note, null, null, $"row {raw.Short.First} has fewer cells than there are names ({layout.Names.Length}){(raw.Short.Count > 1 ? $", like {raw.Short.Count - 1:N0} more rows" : "")}; the absent cells are missing"));
    }
}
