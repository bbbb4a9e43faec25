using System.Globalization;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// Decides what one column is and makes it so. All counts are over the cells that were read, judged once per distinct text.
/// </summary>
internal sealed class ColumnReader
{
    /// <summary>Single cells reported per column and sort of finding; beyond it a count.</summary>
    private const int Reported = 20;

    private readonly ColumnQuestion _ask;
    private readonly RawColumn _raw;
    private readonly RowMap _rows;
    private readonly List<Finding> _findings = [];
    private readonly List<Doubt> _doubts = [];
    private readonly Dictionary<int, CellMark> _marks = [];
    private readonly SortedDictionary<string, int> _missingCodes = new(StringComparer.Ordinal);
    private readonly string[] _trimmed;
    private readonly bool[] _blank;
    private readonly bool[] _missing;

    private ColumnReader(ColumnQuestion ask, RawColumn raw, RowMap rows)
    {
        _ask = ask;
        _raw = raw;
        _rows = rows;
        int n = raw.Texts.Count;
        _trimmed = new string[n];
        _blank = new bool[n];
        _missing = new bool[n];
        for (int i = 0; i < n; i++)
        {
            _trimmed[i] = Blanks.Trim(raw.Texts[i]);
            _blank[i] = _trimmed[i].Length == 0;
            _missing[i] = _blank[i] || SaidMissing(_trimmed[i]) || ask.SaidMissing is null && MissingText.IsUsual(_trimmed[i], amongNumbers: false);
        }
    }

    /// <summary>Judges a column.</summary>
    /// <returns>A <see cref="ColumnReading"/>, or a <see cref="ReadAgain"/> when the column must be read again first.</returns>
    public static object Judge(ColumnQuestion ask, RawColumn raw, RowMap rows) => new ColumnReader(ask, raw, rows).Judge();

    private object Judge()
    {
        int known = _raw.Numbers;
        for (int i = 0; i < _missing.Length; i++)
            known += _missing[i] ? 0 : _raw.Counts[i];

        char mark = _ask.Choice?.DecimalMark ?? _ask.File.DecimalMark ?? MarkOfColumn();
        if (_raw.Decimals > 0 && mark != _raw.DecimalMark && !_raw.AsText && _raw.ThreeDecimals > 0)
            return new ReadAgain(false, mark);

        var numbers = new Numbers(this, mark);
        var dates = new Dates(this);
        var (kind, why) = _ask.Choice?.Kind is { } said ? (said, "chosen by the user") : Kind(known, numbers, dates);
        if (kind is ColumnKind.Category or ColumnKind.OrderedCategory or ColumnKind.Text && _raw.Unrecoverable > 0)
            return new ReadAgain(true, mark);

        string[] first = FirstValues();
        return kind switch
        {
            ColumnKind.Number => numbers.Build(why, known, first),
            ColumnKind.DateTime => dates.Build(why, first),
            ColumnKind.YesNo => BuildYesNo(why, first),
            _ => BuildCoded(kind, why, first),
        };
    }

    private char MarkOfColumn()
    {
        var shown = _raw.Texts.Select((t, i) => (t, _raw.Counts[i])).Where(e => e.Item2 > 0);
        if (_raw.Decimals > _raw.ThreeDecimals)
            shown = shown.Append((_raw.DecimalMark == ',' ? "1,5" : "1.5", _raw.Decimals - _raw.ThreeDecimals));
        return DecimalMarks.OfColumn(shown, _ask.UsualMark);
    }

    private bool SaidMissing(string trimmed) => _ask.SaidMissing is { } codes && codes.Any(c => c.Trim().Equals(trimmed, StringComparison.OrdinalIgnoreCase));

    private (ColumnKind, string) Kind(int known, Numbers numbers, Dates dates)
    {
        string unit = _ask.UnitCell.Length > 0 ? _ask.UnitCell : UnitText.FromHeading(_ask.Name).Unit ?? "";
        if (known == 0)
            return unit.Length > 0 ? (ColumnKind.Number, "no cell has a value; a unit is named") : (ColumnKind.Text, "no cell has a value");
        string all = known.ToString("N0");

        if (dates.Count * 20 >= known * 17 && dates.Count > 0)
            return (ColumnKind.DateTime, dates.Count == known ? $"all {all} values are dates" : $"{dates.Count:N0} of {all} values are dates");
        if (numbers.Count == known && NameClues.Date(_ask.Words) && unit.Length == 0 && dates.Serial() is { } serial)
            return (ColumnKind.DateTime, serial);

        if (numbers.Count > 0 && unit.Length == 0 && numbers.AreCodes() is { } codes)
            return (Coded(known, numbers), codes);
        int words = known - numbers.Count;
        bool mostly = words == 0 || numbers.Count * 20 >= known * 17 || numbers.Count >= 2 && words == 1 || unit.Length > 0 && numbers.Count * 2 > known;
        if (numbers.Count > 0 && mostly)
        {
            if (words > 0 && unit.Length == 0 && numbers.FewWholeWithWords() is { } few)
                return (ColumnKind.Category, few);
            return (ColumnKind.Number, words == 0 ? $"all {all} values are numbers" : $"{numbers.Count:N0} of {all} values are numbers");
        }
        return (Coded(known, numbers, out string why), why);
    }

    private ColumnKind Coded(int known, Numbers numbers) => numbers.Unique && known >= 20 && !NameClues.Vehicle(_ask.Words) ? ColumnKind.Text : ColumnKind.Category;

    private ColumnKind Coded(int known, Numbers numbers, out string why)
    {
        var distinct = new HashSet<string>(StringComparer.Ordinal);
        long length = 0;
        bool lines = false;
        for (int i = 0; i < _trimmed.Length; i++)
        {
            if (_missing[i] || _raw.Counts[i] == 0)
                continue;
            distinct.Add(_trimmed[i]);
            length += (long)_trimmed[i].Length * _raw.Counts[i];
            lines |= _trimmed[i].Contains('\n', StringComparison.Ordinal);
        }
        int count = distinct.Count + numbers.DistinctPlain;
        string counts = $"{count:N0} distinct {(count == 1 ? "text" : "texts")} in {known:N0} {(known == 1 ? "value" : "values")}";
        if (numbers.DistinctPlain == 0 && Ladders.YesNo(distinct) is not null)
        {
            why = $"the values are {string.Join(", ", distinct.Order(StringComparer.Ordinal).Select(d => $"'{d}'"))}";
            return ColumnKind.YesNo;
        }
        if (numbers.DistinctPlain == 0 && Ladders.Order(distinct) is { } ladder)
        {
            why = $"{counts}, in a known order: {string.Join(" < ", ladder)}";
            return ColumnKind.OrderedCategory;
        }
        if (NameClues.Note(_ask.Words))
        {
            why = $"{counts}; the name says remarks";
            return ColumnKind.Text;
        }
        why = counts;
        if (NameClues.Vehicle(_ask.Words))
            return ColumnKind.Category;
        if (NameClues.Run(_ask.Words) && count == known)
        {
            why = $"{counts}, none twice";
            return ColumnKind.Text;
        }
        bool free = lines || length > 40L * known && count * 5 > known || known >= 20 && count * 2 > known;
        return free ? ColumnKind.Text : ColumnKind.Category;
    }

    private string[] FirstValues()
    {
        var first = new List<string>();
        for (int row = 0; row < Math.Min(_raw.Count, 2000) && first.Count < 5; row++)
            if (!_raw.IsBlank(row))
                first.Add(Blanks.OneLine(_raw.TextAt(row), 40));
        return [.. first];
    }

    private ColumnReading BuildYesNo(string why, string[] first)
    {
        var codeOf = new int[_trimmed.Length];
        for (int i = 0; i < codeOf.Length; i++)
        {
            codeOf[i] = _missing[i] ? -1 : Ladders.Answer(_trimmed[i]);
            if (codeOf[i] < 0 && !_blank[i])
                Unread(i, _missing[i], "neither yes nor no");
        }
        var codes = new int[_raw.Count];
        var cells = _raw.Cells;
        int known = 0;
        for (int row = 0; row < codes.Length; row++)
        {
            double cell = cells[row];
            codes[row] = RawColumn.IsText(cell) ? codeOf[RawColumn.CodeOf(cell)] : cell == 1 ? 1 : cell == 0 ? 0 : -1;
            if (!RawColumn.IsText(cell) && codes[row] < 0)
                MarkUnread(row, _raw.TextOf(cell), "neither yes nor no");
            known += codes[row] >= 0 ? 1 : 0;
        }
        MarkUnread();
        return Done(new CodedColumn(Definition(ColumnKind.YesNo), CodedColumn.NoYes, codes), why, first, known);
    }

    private ColumnReading BuildCoded(ColumnKind kind, string why, string[] first)
    {
        bool exact = kind == ColumnKind.Text || _ask.Exact;
        var levels = new List<string>();
        var index = new Dictionary<string, int>(StringComparer.Ordinal);
        int Level(string text)
        {
            if (!index.TryGetValue(text, out int code))
            {
                index.Add(text, code = levels.Count);
                levels.Add(text);
            }
            return code;
        }
        IReadOnlyList<string>? order = null;
        if (kind == ColumnKind.OrderedCategory)
        {
            var present = Enumerable.Range(0, _trimmed.Length).Where(i => !_missing[i] && _raw.Counts[i] > 0).Select(i => _trimmed[i]).Distinct().ToList();
            var plain = PlainLevels();
            order = _ask.Choice?.Levels ?? Ladders.Order(present) ?? (present.Count == 0 && plain.Count <= 1000 ? [.. plain.Order().Select(_raw.TextOf)] : null);
            foreach (string level in order ?? [])
                Level(level);
        }

        var codeOf = new int[_trimmed.Length];
        Array.Fill(codeOf, int.MinValue);
        var numbers = new Dictionary<double, int>();
        var codes = new int[_raw.Count];
        var cells = _raw.Cells;
        int known = 0;
        for (int row = 0; row < codes.Length; row++)
        {
            double cell = cells[row];
            int code;
            if (RawColumn.IsText(cell))
            {
                int i = RawColumn.CodeOf(cell);
                if (codeOf[i] == int.MinValue)
                {
                    codeOf[i] = _missing[i] ? -1 : Level(TextOf(i, exact));
                    if (_missing[i] && !_blank[i])
                        Unread(i, true, "");
                }
                code = codeOf[i];
            }
            else if (!numbers.TryGetValue(cell, out code))
            {
                string text = _raw.TextOf(cell);
                numbers.Add(cell, code = SaidMissing(text) ? -1 : Level(text));
                if (code < 0)
                    _missingCodes[text] = 0;
            }
            codes[row] = code;
            known += code >= 0 ? 1 : 0;
        }
        if (kind == ColumnKind.Category && !_ask.Exact && levels.Count <= 5000)
            JoinVariants(levels, codes);
        if (kind == ColumnKind.OrderedCategory && order is null)
            order = levels;
        var definition = Definition(kind) with { Levels = kind == ColumnKind.OrderedCategory ? [.. levels] : null };
        if (kind == ColumnKind.OrderedCategory && _ask.Choice?.Levels is { } said && levels.Count > said.Count)
            _findings.Add(new Finding(Severity.Warning, _ask.Name, null, $"column {_ask.Name} holds {levels.Count - said.Count} texts beyond the given order ({Quote(levels.Skip(said.Count))}); they are put above it"));
        int used = levels.Count;
        return Done(new CodedColumn(definition, [.. levels], codes), why, first, known) with { Unique = known == _raw.Count && used == known && known > 0 };
    }

    private string TextOf(int code, bool exact)
    {
        string text = exact ? _raw.Texts[code] : _trimmed[code];
        return _ask.Guarded ? FormulaText.Undo(text) : text;
    }

    private HashSet<double> PlainLevels()
    {
        var distinct = new HashSet<double>();
        foreach (double cell in _raw.Cells)
            if (!RawColumn.IsText(cell) && distinct.Count <= 1000)
                distinct.Add(cell);
        return distinct;
    }

    // Spellings that differ only in capitals or inner blanks are pointed out. A rare one is read as the common one, with the
    // file's own spelling kept at the cell; where none is clearly the common one they stay apart.
    private void JoinVariants(List<string> levels, int[] codes)
    {
        var groups = levels.Select((l, i) => (Key: string.Join(' ', l.ToUpperInvariant().Split([' ', '-', '_', '\u00a0'], StringSplitOptions.RemoveEmptyEntries)), Code: i))
            .GroupBy(x => x.Key).Where(g => g.Count() > 1).ToList();
        if (groups.Count == 0)
            return;
        var counts = new int[levels.Count];
        var firsts = new int[levels.Count];
        for (int row = codes.Length - 1; row >= 0; row--)
            if (codes[row] >= 0)
            {
                counts[codes[row]]++;
                firsts[codes[row]] = row;
            }
        var into = Enumerable.Range(0, levels.Count).ToArray();
        int told = 0;
        foreach (var group in groups)
        {
            var byCount = group.Select(x => x.Code).OrderByDescending(c => counts[c]).ToList();
            int common = byCount[0];
            var rare = byCount.Skip(1).Where(c => !_ask.File.KeepSpellings && counts[c] * 4 <= counts[common]).ToList();
            foreach (int code in rare)
                into[code] = common;
            string all = string.Join(" and ", byCount.Select(c => $"'{levels[c]}' ({counts[c]:N0})"));
            if (++told <= Reported)
                _findings.Add(new Finding(Severity.Warning, _ask.Name, firsts[byCount[^1]] + 1, rare.Count == byCount.Count - 1
                    ? $"column {_ask.Name}: {all} differ only in capitals or blanks; they are read as '{levels[common]}', the file's spelling is kept at the cell"
                    : $"column {_ask.Name}: {all} differ only in capitals or blanks; they are kept apart"));
        }
        if (Enumerable.Range(0, into.Length).All(c => into[c] == c))
            return;
        for (int row = 0; row < codes.Length; row++)
            if (codes[row] >= 0 && into[codes[row]] != codes[row])
            {
                _marks[row + 1] = new CellMark(CellState.Measured) { Original = levels[codes[row]], Reason = "another spelling of the same" };
                codes[row] = into[codes[row]];
            }
        // levels keep the order of first appearance among those that are left
        var left = new List<string>();
        var renumber = new int[levels.Count];
        foreach (int code in Enumerable.Range(0, levels.Count).Where(c => into[c] == c).OrderBy(c => group0(c)))
        {
            renumber[code] = left.Count;
            left.Add(levels[code]);
        }
        for (int row = 0; row < codes.Length; row++)
            if (codes[row] >= 0)
                codes[row] = renumber[codes[row]];
        levels.Clear();
        levels.AddRange(left);

        int group0(int common) => Enumerable.Range(0, firsts.Length).Where(c => into[c] == common && counts[c] > 0).Select(c => firsts[c]).DefaultIfEmpty(int.MaxValue).Min();
    }

    private ColumnDefinition Definition(ColumnKind kind) => new(_ask.Name, kind) { Role = _ask.Choice?.Role ?? ColumnRole.Attribute, Unit = _ask.Choice?.Unit is { Length: > 0 } unit ? UnitText.Find(unit) ?? unit : null };

    private ColumnReading Done(Column column, string why, string[] first, int known)
    {
        var codes = _ask.SaidMissing is { } said ? said.Where(s => s.Length > 0).ToList() : [.. _missingCodes.Keys];
        string missing = _missingCodes.Count == 0 ? "" : $"; {Quote(_missingCodes.Keys)} read as missing";
        foreach (var (text, count) in _missingCodes.Where(c => c.Value > 0))
        {
            int row = FirstRowOf(text);
            _findings.Add(new Finding(Severity.Note, _ask.Name, row < 0 ? null : row + 1, $"column {_ask.Name}: '{Blanks.OneLine(text, 30)}' in {count:N0} {(count == 1 ? "cell" : "cells")} read as missing{(row < 0 ? "" : $" (first in row {_rows[row]})")}"));
        }
        return new ColumnReading
        {
            Column = column.With(column.Definition with { MissingCodes = codes }),
            Marks = _marks,
            Findings = _findings,
            Doubts = _doubts,
            Evidence = Capital(why) + missing + ".",
            FirstValues = first,
            Known = known,
            FarCodes = _farCodes,
        };
    }

    private static string Capital(string text) => text.Length == 0 ? text : char.ToUpperInvariant(text[0]) + text[1..];

    private static string Quote(IEnumerable<string> texts)
    {
        var some = texts.Take(6).Select(t => $"'{Blanks.OneLine(t, 30)}'").ToList();
        return string.Join(", ", some);
    }

    private int FirstRowOf(string trimmed)
    {
        int best = -1;
        for (int i = 0; i < _trimmed.Length; i++)
            if (_raw.Counts[i] > 0 && _trimmed[i].Equals(trimmed, StringComparison.Ordinal) && _raw.FirstRows[i] >= 0 && (best < 0 || _raw.FirstRows[i] < best))
                best = _raw.FirstRows[i];
        return best;
    }

    private readonly HashSet<double> _farCodes = [];
    private readonly Dictionary<int, string> _unread = [];

    // notes that a distinct text has no value here: as a missing code, or as a text that could not be read
    private void Unread(int code, bool asCode, string why)
    {
        if (_raw.Counts[code] == 0)
            return;
        if (asCode)
            _missingCodes[_trimmed[code]] = _missingCodes.GetValueOrDefault(_trimmed[code]) + _raw.Counts[code];
        else
            _unread[code] = why;
    }

    private int _unreadCells;

    private void MarkUnread(int row, string text, string why, string done = "kept as text, treated as missing", CellState state = CellState.Missing)
    {
        _marks[row + 1] = new CellMark(state) { Original = text, Reason = why };
        if (++_unreadCells <= Reported)
            _findings.Add(new Finding(Severity.Warning, _ask.Name, row + 1, $"row {_rows[row]}, column {_ask.Name}: '{Blanks.OneLine(text, 40)}' is {why}; {done}"));
        else if (_unreadCells == Reported + 1)
            _findings.Add(new Finding(Severity.Warning, _ask.Name, null, ""));
    }

    private void MarkUnread()
    {
        if (_unread.Count > 0)
        {
            var cells = _raw.Cells;
            for (int row = 0; row < cells.Length; row++)
                if (RawColumn.IsText(cells[row]) && _unread.TryGetValue(RawColumn.CodeOf(cells[row]), out string? why))
                    MarkUnread(row, _raw.Texts[RawColumn.CodeOf(cells[row])], why);
        }
        if (_unreadCells > Reported)
        {
            int at = _findings.FindIndex(f => f.Text.Length == 0);
            _findings[at] = new Finding(Severity.Warning, _ask.Name, null, $"column {_ask.Name}: {_unreadCells - Reported:N0} more cells that could not be read; kept as text, treated as missing");
        }
    }

    /// <summary>The column's cells as numbers.</summary>
    private sealed class Numbers
    {
        private readonly ColumnReader _of;
        private readonly double[] _values;
        private readonly NumberNote[] _notes;
        private readonly string[] _extras;
        private readonly bool[] _is;
        private readonly bool[] _missingToo;
        private int _otherMark;
        private int _distinct = -1;

        public Numbers(ColumnReader of, char mark)
        {
            _of = of;
            var raw = of._raw;
            int n = raw.Texts.Count;
            _values = new double[n];
            _notes = new NumberNote[n];
            _extras = new string[n];
            _is = new bool[n];
            _missingToo = new bool[n];
            Mark = mark;
            char other = mark == '.' ? ',' : '.';
            Count = raw.Numbers;
            for (int i = 0; i < n; i++)
            {
                _values[i] = double.NaN;
                _extras[i] = "";
                if (of._missing[i] || raw.Counts[i] == 0)
                    continue;
                string text = raw.Texts[i];
                if (NumberText.TryRead(text, mark, out _values[i], out _notes[i], out _extras[i]))
                    _is[i] = true;
                else if (NumberText.Shows(text) == other && NumberText.TryRead(text, other, out _values[i], out _notes[i], out _extras[i]))
                {
                    _is[i] = true;
                    _otherMark += raw.Counts[i];
                }
                else if (of._ask.SaidMissing is null && MissingText.IsUsual(of._trimmed[i], amongNumbers: true))
                    _missingToo[i] = true;
                if (_is[i])
                    Count += raw.Counts[i];
                if (_missingToo[i])
                    MissingToo += raw.Counts[i];
            }
            // words such as "void" mean missing only where enough numbers surround them
            if (MissingToo > 0 && Count > MissingToo)
                Count += 0;
        }

        public char Mark { get; }

        /// <summary>Cells that are numbers.</summary>
        public int Count { get; }

        public int MissingToo { get; }

        /// <summary>Distinct plain numbers, counted to 1,000.</summary>
        public int DistinctPlain
        {
            get
            {
                if (_distinct < 0)
                    _distinct = _of._raw.Numbers == 0 ? 0 : _of.PlainLevels().Count;
                return _distinct;
            }
        }

        /// <summary>Whether all plain numbers differ.</summary>
        public bool Unique
        {
            get
            {
                var raw = _of._raw;
                var seen = new HashSet<double>(raw.Numbers);
                foreach (double cell in raw.Cells)
                    if (!RawColumn.IsText(cell) && !seen.Add(cell))
                        return false;
                return Enumerable.Range(1, raw.Texts.Count - 1).All(i => _of._missing[i] || raw.Counts[i] <= 1);
            }
        }

        /// <summary>Why the numbers are codes rather than amounts; null when they are amounts.</summary>
        public string? AreCodes()
        {
            var raw = _of._raw;
            bool byName = NameClues.Code(_of._ask.Words) || NameClues.Run(_of._ask.Words);
            int zeros = 0, other = 0;
            for (int i = 1; i < _is.Length; i++)
            {
                if (_of._missing[i] || raw.Counts[i] == 0)
                    continue;
                string text = _of._trimmed[i];
                if (text.Length > 1 && text[0] == '0' && !text.AsSpan().ContainsAnyExceptInRange('0', '9'))
                    zeros += raw.Counts[i];
                else
                    other += raw.Counts[i];
            }
            if (raw.Decimals > 0 || other > 0 && !byName)
                return null;
            if (zeros > 0 && other == 0)
                return $"{zeros:N0} of {Count:N0} values begin with a zero, so they are codes, not amounts";
            if (!byName || raw.Numbers == 0)
                return null;
            double previous = double.NaN;
            bool counter = true;
            foreach (double cell in raw.Cells)
            {
                if (RawColumn.IsText(cell))
                {
                    counter = false;
                    continue;
                }
                if (cell < 0 || cell != Math.Floor(cell))
                    return null;
                counter &= double.IsNaN(previous) || cell == previous + 1;
                previous = cell;
            }
            return counter && raw.Numbers > 20 && !NameClues.Vehicle(_of._ask.Words) ? null : "the name says that the numbers are codes, not amounts";
        }

        /// <summary>Why few whole numbers with words among them are a category; null when they are not.</summary>
        public string? FewWholeWithWords()
        {
            var raw = _of._raw;
            if (raw.Decimals > 0 || DistinctPlain > 12)
                return null;
            int words = 0;
            for (int i = 1; i < _is.Length; i++)
                if (!_of._missing[i] && !_missingToo[i] && raw.Counts[i] > 0 && !_is[i] && _of._trimmed[i].Length > 2 && _of._trimmed[i].All(char.IsLetter))
                    words++;
            return words == 0 ? null : $"{DistinctPlain} different whole numbers with {words} {(words == 1 ? "word" : "words")} among them, so they are names of sorts";
        }

        public ColumnReading Build(string why, int known, string[] first)
        {
            var raw = _of._raw;
            var ask = _of._ask;
            var (unit, how) = UnitOf();
            int footnotes = 0, censored = 0;
            var marked = new Dictionary<int, (string Reason, bool Value)>();
            for (int i = 1; i < _is.Length; i++)
            {
                if (raw.Counts[i] == 0 || _of._blank[i])
                    continue;
                if (_of._missing[i] || _missingToo[i])
                    _of.Unread(i, true, "");
                else if (!_is[i])
                    _of.Unread(i, false, "not a number");
                else
                    switch (_notes[i])
                    {
                        case NumberNote.Footnote:
                            footnotes += raw.Counts[i];
                            marked[i] = ($"footnote mark '{_extras[i]}'", true);
                            break;
                        case NumberNote.Censored:
                            censored += raw.Counts[i];
                            _of.Unread(i, false, "a limit, not a measured value");
                            break;
                        case NumberNote.Infinite:
                            _of.Unread(i, false, "not a finite number");
                            break;
                        case NumberNote.Unit:
                            Convert(i, ref unit, ref how, marked);
                            break;
                    }
            }
            var values = raw.TakeCells(code => _values[code], out var codes);
            foreach (var (code, (reason, _)) in marked)
                _ = (code, reason);
            MarkNoted(codes, marked);
            if (footnotes > 0)
                _of._findings.Add(new Finding(Severity.Note, ask.Name, null, $"column {ask.Name}: {footnotes:N0} {(footnotes == 1 ? "value carries a footnote mark" : "values carry footnote marks")}; the numbers are kept, the marks noted at the cells"));
            MarkUnreadCells(codes);
            FarCodes(values);
            if (_otherMark > 0)
                _of._findings.Add(new Finding(Severity.Warning, ask.Name, null, $"column {ask.Name}: {_otherMark:N0} {(_otherMark == 1 ? "value has" : "values have")} a decimal {(Mark == '.' ? "comma" : "point")} while the others have a {(Mark == '.' ? "point" : "comma")}; both are read as decimal marks"));
            int count = 0;
            foreach (double value in values)
                count += double.IsNaN(value) ? 0 : 1;
            bool commas = Mark == ',' && (raw.DecimalMark == ',' && raw.Decimals > 0 || Enumerable.Range(1, raw.Texts.Count - 1).Any(i => _is[i] && raw.Texts[i].Contains(',', StringComparison.Ordinal)));
            string evidence = why + (commas ? " with a decimal comma" : "") + (how.Length > 0 ? $"; {how}" : "");
            var definition = _of.Definition(ColumnKind.Number);
            if (ask.Choice?.Unit is null)
                definition = definition with { Unit = unit };
            return _of.Done(new NumberColumn(definition, values), evidence, first, count);
        }

        private (string? Unit, string How) UnitOf()
        {
            if (_of._ask.UnitCell.Length > 0)
                return (UnitText.Find(_of._ask.UnitCell) ?? _of._ask.UnitCell, $"the unit row says {_of._ask.UnitCell}");
            return UnitText.FromHeading(_of._ask.Name);
        }

        // a unit after the number: the first one met names the column's unit where nothing else does; others are converted into it
        private void Convert(int code, ref string? unit, ref string how, Dictionary<int, (string, bool)> marked)
        {
            string suffix = UnitText.Find(_extras[code])!;
            if (unit is null)
            {
                unit = suffix;
                how = $"the values carry {_extras[code]}";
                return;
            }
            if (unit == suffix)
                return;
            var from = Records.Units.Unit.Find(suffix);
            var to = Records.Units.Unit.Find(unit);
            if ((suffix, unit) is ("°F", "°C"))
                _values[code] = (_values[code] - 32) / 1.8;
            else if ((suffix, unit) is ("°C", "°F"))
                _values[code] = _values[code] * 1.8 + 32;
            else if (from?.BaseCode is not null && from.BaseCode == to?.BaseCode)
                _values[code] = to.FromBaseValue(from.ToBaseValue(_values[code]));
            else
            {
                _of.Unread(code, false, $"in {_extras[code]}, which does not convert into {unit}");
                _values[code] = double.NaN;
                return;
            }
            marked[code] = ($"converted from {_extras[code]}", true);
        }

        private void MarkNoted(int[]? codes, Dictionary<int, (string Reason, bool Value)> marked)
        {
            if (codes is null || marked.Count == 0)
                return;
            for (int row = 0; row < codes.Length; row++)
                if (codes[row] > 0 && marked.TryGetValue(codes[row], out var note))
                    _of._marks[row + 1] = new CellMark(CellState.Measured) { Original = _of._raw.Texts[codes[row]], Reason = note.Reason };
        }

        private void MarkUnreadCells(int[]? codes)
        {
            if (codes is null)
                return;
            if (_of._unread.Count > 0)
                for (int row = 0; row < codes.Length; row++)
                    if (codes[row] > 0 && _of._unread.TryGetValue(codes[row], out string? why))
                        _of.MarkUnread(row, _of._raw.Texts[codes[row]], why);
            _of._unread.Clear();
            _of.MarkUnread();
        }

        private static bool IsCandidate(double v) => v is 999 or 9999 or 99999 or 999999 or 999.9 or 9999.9 or -99 or -999 or -9999 or -99999 or -99.9 or -999.9 or -9999.9;

        // numbers that stand for "missing": a usual code that lies far outside everything else in the column
        private void FarCodes(double[] values)
        {
            var ask = _of._ask;
            if (ask.SaidMissing is { } said)
            {
                var numeric = said.Select(s => NumberText.TryRead(s, Mark, out double v, out var note, out _) && note == NumberNote.None ? v : double.NaN).Where(v => !double.IsNaN(v)).ToHashSet();
                if (numeric.Count > 0)
                    for (int row = 0; row < values.Length; row++)
                        if (numeric.Contains(values[row]))
                            values[row] = Code(values[row]);
                return;
            }
            var counts = new Dictionary<double, int>();
            foreach (double v in values)
                if (!(v > -99 && v < 999) && IsCandidate(v))
                    counts[v] = counts.GetValueOrDefault(v) + 1;
            if (counts.Count == 0)
                return;
            int stride = Math.Max(1, values.Length / 100_000);
            var rest = new List<double>();
            double least = double.MaxValue, most = double.MinValue;
            for (int row = 0; row < values.Length; row++)
            {
                double v = values[row];
                if (double.IsNaN(v) || counts.ContainsKey(v))
                    continue;
                least = Math.Min(least, v);
                most = Math.Max(most, v);
                if (row % stride == 0)
                    rest.Add(v);
            }
            if (rest.Count < 3)
                return;
            rest.Sort();
            double low = rest[(int)(0.01 * (rest.Count - 1))], high = rest[(int)(0.99 * (rest.Count - 1))];
            double range = Math.Max(high - low, 0.05 * Math.Max(Math.Abs(high), Math.Abs(low)));
            var codes = new HashSet<double>();
            foreach (var (v, count) in counts.OrderBy(c => c.Key))
            {
                bool far = v > high + 2 * range || v < low - 2 * range || v < 0 && least >= 0 && v < -range;
                bool alone = count == 1 && v < most + range && v > least - range;
                if (far && !alone)
                    codes.Add(v);
                else if (v > most || v < least)
                    _of._findings.Add(new Finding(Severity.Warning, ask.Name, null, $"column {ask.Name}: {_of._raw.TextOf(v)} occurs {count:N0} {(count == 1 ? "time" : "times")}, outside the other values ({_of._raw.TextOf(least)} to {_of._raw.TextOf(most)}); it is read as a number, check whether it means missing"));
            }
            if (codes.Count == 0)
                return;
            _of._farCodes.UnionWith(codes);
            var read = codes.ToDictionary(c => c, _ => (First: -1, Count: 0));
            for (int row = 0; row < values.Length; row++)
                if (codes.Contains(values[row]))
                {
                    var (firstRow, n) = read[values[row]];
                    read[values[row]] = (firstRow < 0 ? row : firstRow, n + 1);
                    values[row] = Code(values[row]);
                }
            foreach (var (v, (firstRow, n)) in read.OrderBy(c => c.Key))
                _of._findings.Add(new Finding(Severity.Warning, ask.Name, firstRow + 1, $"column {ask.Name}: {_of._raw.TextOf(v)} in {n:N0} {(n == 1 ? "cell" : "cells")} (first in row {_of._rows[firstRow]}) lies far outside the other values ({_of._raw.TextOf(least)} to {_of._raw.TextOf(most)}) and is read as missing"));
        }

        private double Code(double value)
        {
            _of._missingCodes.TryAdd(_of._raw.TextOf(value), 0);
            return double.NaN;
        }
    }

    /// <summary>The column's cells as dates.</summary>
    private sealed class Dates
    {
        private readonly ColumnReader _of;
        private readonly DateShape[] _shapes;
        private int _clear, _day, _month, _either;
        private bool _dotted;
        private Func<double, long>? _fromNumber;

        public Dates(ColumnReader of)
        {
            _of = of;
            var raw = of._raw;
            _shapes = new DateShape[raw.Texts.Count];
            for (int i = 1; i < _shapes.Length; i++)
            {
                int count = raw.Counts[i];
                if (of._missing[i] || count == 0)
                    continue;
                _shapes[i] = DateText.Read(of._trimmed[i], DateOrder.DayFirst, out _);
                switch (_shapes[i])
                {
                    case DateShape.Clear:
                        _clear += count;
                        break;
                    case DateShape.DayFirst:
                        _day += count;
                        break;
                    case DateShape.MonthFirst:
                        _month += count;
                        break;
                    case DateShape.Either:
                        _either += count;
                        _dotted |= of._trimmed[i].Count(c => c == '.') >= 2;
                        break;
                }
            }
            // a date column whose name or choice says so may hold 20310407 or serial days
            if (of._ask.Choice?.Kind == ColumnKind.DateTime && raw.Numbers > 0)
                _ = Serial();
        }

        public int Count => _clear + _day + _month + _either;

        /// <summary>Reads plain numbers as dates where all of them are: 20310407, or days counted as spreadsheets do; the evidence, or null.</summary>
        public string? Serial()
        {
            bool written = true, days = true;
            foreach (double cell in _of._raw.Cells)
            {
                if (RawColumn.IsText(cell))
                    continue;
                written &= cell == Math.Floor(cell) && cell is >= 18000101 and <= 22001231 && Written(cell) != DateTimeColumn.Missing;
                days &= cell is >= 10_000 and < 100_000;
            }
            if (_of._raw.Numbers == 0)
                return null;
            if (written)
            {
                _fromNumber = Written;
                return "the numbers are dates written as year, month, day without marks";
            }
            if (!days)
                return null;
            bool from1904 = _of._ask.From1904;
            _fromNumber = day => FromSerial(day, from1904);
            _of._findings.Add(new Finding(Severity.Note, _of._ask.Name, null, $"column {_of._ask.Name}: serial days are read as dates counted from {(from1904 ? "1904" : "1900")}"));
            return $"the name says date and the numbers are days counted from {(from1904 ? "1904" : "1900")}";
        }

        // day 60 of the 1900 system is a 29 February that never was; every later day is counted from 1899-12-30
        private static long FromSerial(double day, bool from1904)
        {
            var origin = from1904 ? new DateTime(1904, 1, 1) : new DateTime(1899, 12, 30);
            return origin.Ticks + (long)Math.Round(day * 86_400_000) * TimeSpan.TicksPerMillisecond;
        }

        private static long Written(double number) =>
            DateTime.TryParseExact(((long)number).ToString("00000000"), "yyyyMMdd", CultureInfo.InvariantCulture, DateTimeStyles.None, out var date) ? date.Ticks : DateTimeColumn.Missing;

        public ColumnReading Build(string why, string[] first)
        {
            var raw = _of._raw;
            var ask = _of._ask;
            var order = ask.Choice?.DateOrder ?? ask.File.DateOrder;
            string how = "";
            if (order is null && _either + _day + _month > 0)
            {
                bool settled = _day == 0 != (_month == 0) || _dotted && _month == 0;
                order = _month > _day ? DateOrder.MonthFirst : DateOrder.DayFirst;
                string sure = order == DateOrder.DayFirst ? "day first" : "month first";
                int one = Math.Max(_day, _month);
                if (settled)
                    how = one > 0 ? $"; {one:N0} of them only {(one == 1 ? "makes" : "make")} a date with {sure}" : "; points between the parts mean day first";
                else
                {
                    string text = FirstEither();
                    how = $"; {sure} is taken until someone chooses";
                    _doubts(new Doubt(DoubtAbout.DateOrder, ask.Name,
                        _day + _month == 0
                            ? $"{ask.Name}: all {_either:N0} dates make sense with the day or the month first, for example '{text}'. Which is it?"
                            : $"{ask.Name}: {_day:N0} dates only make sense with the day first, {_month:N0} only with the month first, and {_either:N0} with either. Which is it?",
                        [new("day first", "day first"), new("month first", "month first")], sure));
                    _of._findings.Add(new Finding(Severity.Warning, ask.Name, null, $"column {ask.Name}: the file does not settle whether the day or the month comes first; {sure} is taken"));
                }
            }
            var read = order ?? DateOrder.DayFirst;
            var ticksOf = new long[_shapes.Length];
            for (int i = 0; i < ticksOf.Length; i++)
            {
                ticksOf[i] = DateTimeColumn.Missing;
                if (_of._blank[i] || raw.Counts[i] == 0)
                    continue;
                if (_of._missing[i] || ask.SaidMissing is null && _shapes[i] == DateShape.None && MissingText.IsUsual(_of._trimmed[i], amongNumbers: true))
                {
                    _of.Unread(i, true, "");
                    continue;
                }
                var shape = DateText.Read(_of._trimmed[i], read, out long ticks);
                bool against = shape == DateShape.DayFirst && read == DateOrder.MonthFirst || shape == DateShape.MonthFirst && read == DateOrder.DayFirst;
                if (shape == DateShape.None || against && (ask.Choice?.DateOrder ?? ask.File.DateOrder) is not null)
                    _of.Unread(i, false, against ? $"no date with the {(read == DateOrder.DayFirst ? "day" : "month")} first" : "not a date");
                else
                    ticksOf[i] = ticks;
            }
            int zoned = Enumerable.Range(1, ticksOf.Length - 1).Where(i => ticksOf[i] != DateTimeColumn.Missing && DateText.HasZone(_of._trimmed[i])).Sum(i => raw.Counts[i]);
            if (zoned > 0)
                _of._findings.Add(new Finding(Severity.Warning, ask.Name, null, $"column {ask.Name}: {zoned:N0} {(zoned == 1 ? "value carries" : "values carry")} a time zone; the clock time is kept as written, the zone is not"));
            var values = new long[raw.Count];
            var cells = raw.Cells;
            int known = 0;
            for (int row = 0; row < values.Length; row++)
            {
                double cell = cells[row];
                values[row] = RawColumn.IsText(cell) ? ticksOf[RawColumn.CodeOf(cell)] : _fromNumber?.Invoke(cell) ?? DateTimeColumn.Missing;
                if (values[row] == DateTimeColumn.Missing && !RawColumn.IsText(cell))
                    _of.MarkUnread(row, raw.TextOf(cell), "not a date");
                known += values[row] != DateTimeColumn.Missing ? 1 : 0;
            }
            _of.MarkUnread();
            return _of.Done(new DateTimeColumn(_of.Definition(ColumnKind.DateTime), values), why + how, first, known);
        }

        private void _doubts(Doubt doubt) => _of._doubts.Add(doubt);

        private string FirstEither()
        {
            int best = -1;
            for (int i = 1; i < _shapes.Length; i++)
                if (_shapes[i] == DateShape.Either && (best < 0 || _of._raw.FirstRows[i] < _of._raw.FirstRows[best]))
                    best = i;
            return best < 0 ? "" : _of._trimmed[best];
        }
    }
}
