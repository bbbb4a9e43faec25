using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;

namespace Gaugeyard.Analysis.Sampling;

/// <summary>
/// The records a question is about, as arrays: slice applied, set-aside records left out, filled and set-aside cells read as
/// missing unless asked for, every record that was left out counted with its reason, vehicles coded 0 .. V-1.
/// Immutable; row i of every array is the same record.
/// </summary>
public sealed class Sample
{
    private readonly RevisionContent _content;
    private readonly Question _question;
    private readonly List<LeftOut> _leftOut;

    private Sample(RevisionContent content, Question question, int[] rows, List<LeftOut> leftOut)
    {
        _content = content;
        _question = question;
        Rows = rows;
        _leftOut = leftOut;
        VehicleColumn = question.Vehicles == VehicleUse.Ignore ? null : content.FindRole(ColumnRole.Vehicle)?.Name;
        if (VehicleColumn is not null)
            (VehicleOf, VehicleNames) = CodeVehicles(content.Column(VehicleColumn), rows, content.Numbers);
    }

    /// <summary>Row in the revision of each record of the sample, rising.</summary>
    public int[] Rows { get; }

    /// <summary>Number of records.</summary>
    public int Count => Rows.Length;

    /// <summary>Name of the column that says which vehicle a run belongs to; null when there is none or it is to be ignored.</summary>
    public string? VehicleColumn { get; }

    /// <summary>Vehicle code 0 .. V-1 of each record, in order of first appearance; null when vehicles are not told apart.
    /// A record without a vehicle is a vehicle of its own.</summary>
    public int[]? VehicleOf { get; }

    /// <summary>Name of each vehicle code; null when vehicles are not told apart.</summary>
    public string[]? VehicleNames { get; }

    /// <summary>Number of vehicles; null when they are not told apart.</summary>
    public int? VehicleCount => VehicleNames?.Length;

    /// <summary>Whether any vehicle has more than one record.</summary>
    public bool VehiclesRepeat => VehicleNames is not null && VehicleNames.Length < Count;

    /// <summary>Records left out so far, by reason.</summary>
    public IReadOnlyList<LeftOut> LeftOut => _leftOut;

    /// <summary>Where the sample comes from.</summary>
    public RevisionContent Content => _content;

    /// <summary>
    /// The records of the question's slice.
    /// </summary>
    /// <exception cref="QuestionException">The slice names a column that does not exist, or cannot be applied.</exception>
    public static Sample Of(RevisionContent content, Question question)
    {
        if (question.Confidence is not (> 0 and < 1))
            throw new QuestionException($"The confidence must lie between 0 and 1, for example 0.95, but is {question.Confidence}.");
        bool[] keep;
        try
        {
            keep = SliceFilter.Select(content, question.Slice);
        }
        catch (SliceException e)
        {
            throw new QuestionException(e.Message);
        }
        var rows = new List<int>(content.Count);
        int outside = 0, setAside = 0;
        for (int row = 0; row < keep.Length; row++)
        {
            if (!keep[row])
                outside++;
            else if (content.SetAside.Count > 0 && content.SetAside.ContainsKey(content.Numbers[row]))
                setAside++;
            else
                rows.Add(row);
        }
        var leftOut = new List<LeftOut>();
        if (setAside > 0)
            leftOut.Add(new LeftOut("set aside", setAside));
        if (outside > 0)
            leftOut.Add(new LeftOut("outside the slice", outside));
        return new Sample(content, question, [.. rows], leftOut);
    }

    /// <summary>The sample without the records at which a flag is false; they are counted under the reason.</summary>
    public Sample Keep(bool[] keep, string reason)
    {
        if (keep.Length != Count)
            throw new ArgumentException($"keep must have length {Count} but has {keep.Length}", nameof(keep));
        int[] rows = [.. Rows.Where((_, i) => keep[i])];
        var leftOut = new List<LeftOut>(_leftOut);
        if (rows.Length < Count)
            leftOut.Add(new LeftOut(reason, Count - rows.Length));
        return new Sample(_content, _question, rows, leftOut);
    }

    /// <summary>The sample without the records that miss a value in any of these columns; counted per column, first column first.</summary>
    public Sample Complete(params IEnumerable<string> columns)
    {
        var sample = this;
        foreach (string name in columns.Distinct(StringComparer.Ordinal))
        {
            var column = Require(name);
            bool[] known = sample.Known(column);
            if (Array.IndexOf(known, false) >= 0)
                sample = sample.Keep(known, $"{name} missing");
        }
        return sample;
    }

    /// <summary>Whether each record has a usable value in the column.</summary>
    public bool[] Known(Column column)
    {
        var usable = Usable(column);
        var known = new bool[Count];
        for (int i = 0; i < known.Length; i++)
            known[i] = usable(Rows[i]);
        return known;
    }

    /// <summary>A number column; NaN where there is no usable value.</summary>
    /// <exception cref="QuestionException">No such column, or not of numbers.</exception>
    public double[] Number(string name)
    {
        if (Require(name) is not NumberColumn column)
            throw new QuestionException($"'{name}' does not hold numbers. Choose a number column, or change its kind on the Records page.");
        var usable = Usable(column);
        var values = new double[Count];
        for (int i = 0; i < values.Length; i++)
            values[i] = usable(Rows[i]) ? column.Values[Rows[i]] : double.NaN;
        return values;
    }

    /// <summary>
    /// Any column as codes: levels in ordinal order of their labels (ordered categories in their own order, numbers and dates
    /// ascending), only levels that occur in the sample; code -1 where there is no usable value.
    /// </summary>
    /// <exception cref="QuestionException">No such column.</exception>
    public (int[] Codes, string[] Levels) Category(string name)
    {
        var column = Require(name);
        var usable = Usable(column);
        var codes = new int[Count];
        if (column is CodedColumn coded)
        {
            var seen = new bool[coded.Levels.Length];
            for (int i = 0; i < codes.Length; i++)
            {
                codes[i] = usable(Rows[i]) ? coded.Codes[Rows[i]] : -1;
                if (codes[i] >= 0)
                    seen[codes[i]] = true;
            }
            var order = Enumerable.Range(0, coded.Levels.Length).Where(k => seen[k]);
            order = column.Definition.Kind is ColumnKind.OrderedCategory or ColumnKind.YesNo ? order : order.OrderBy(k => coded.Levels[k], StringComparer.Ordinal);
            int[] kept = LevelOrder(coded, [.. order]);
            return Recode(codes, kept, [.. kept.Select(k => coded.Levels[k])], coded.Levels.Length);
        }
        var keys = new double[Count];
        for (int i = 0; i < keys.Length; i++)
            keys[i] = !usable(Rows[i]) ? double.NaN : column is NumberColumn n ? n.Values[Rows[i]] : ((DateTimeColumn)column).Ticks[Rows[i]];
        double[] distinct = [.. keys.Where(k => !double.IsNaN(k)).Distinct().Order()];
        var labels = new string[distinct.Length];
        for (int i = 0; i < codes.Length; i++)
        {
            codes[i] = double.IsNaN(keys[i]) ? -1 : Array.BinarySearch(distinct, keys[i]);
            if (codes[i] >= 0)
                labels[codes[i]] ??= column.TextAt(Rows[i])!;
        }
        return (codes, labels);
    }

    /// <summary>The column of a name.</summary>
    /// <exception cref="QuestionException">There is none.</exception>
    public Column Require(string name)
    {
        if (_content.Find(name) is null)
            throw new QuestionException($"There is no column called '{name}'. The columns are: {string.Join(", ", _content.Definitions.Take(12).Select(d => d.Name))}{(_content.Definitions.Count > 12 ? ", ..." : "")}.");
        return _content.Column(name);
    }

    /// <summary>The record number of row i of the sample.</summary>
    public int RecordAt(int i) => _content.Numbers[Rows[i]];

    /// <summary>What to call record i: its run name, else its vehicle, else "record n".</summary>
    public string LabelAt(int i)
    {
        foreach (var role in (ReadOnlySpan<ColumnRole>)[ColumnRole.RunName, ColumnRole.Vehicle])
            if (_content.FindRole(role) is { } d && _content.Column(d.Name).TextAt(Rows[i]) is { } text)
                return text;
        return $"record {RecordAt(i)}";
    }

    /// <summary>The basis of an answer that used exactly this sample.</summary>
    public Basis Basis() => new(_content.Revision, Count, VehicleCount, LeftOut, _question.Seed, WireFormat.Fingerprint(_content.Fingerprint, _question));

    private static int[] LevelOrder(CodedColumn column, int[] order)
    {
        // labels that are all numbers stand in numeric order
        if (column.Definition.Kind != ColumnKind.Category || order.Length == 0)
            return order;
        var numbers = new double[order.Length];
        for (int i = 0; i < order.Length; i++)
            if (!double.TryParse(column.Levels[order[i]], System.Globalization.NumberStyles.Float, System.Globalization.CultureInfo.InvariantCulture, out numbers[i]))
                return order;
        Array.Sort(numbers, order);
        return order;
    }

    private static (int[], string[]) Recode(int[] codes, int[] kept, string[] labels, int levels)
    {
        var place = new int[levels];
        for (int k = 0; k < kept.Length; k++)
            place[kept[k]] = k;
        for (int i = 0; i < codes.Length; i++)
            if (codes[i] >= 0)
                codes[i] = place[codes[i]];
        return (codes, labels);
    }

    private Func<int, bool> Usable(Column column)
    {
        var marks = _content.MarksOf(column.Name);
        if (marks.Count == 0)
            return row => !column.IsMissing(row);
        return row => !column.IsMissing(row)
            && (!marks.TryGetValue(_content.Numbers[row], out var mark)
                || (mark.State != CellState.SetAside && (mark.State != CellState.Filled || _question.WithFilled)));
    }

    private static (int[], string[]) CodeVehicles(Column column, int[] rows, RecordNumbers numbers)
    {
        var codes = new int[rows.Length];
        var names = new List<string>();
        var index = new Dictionary<string, int>(StringComparer.Ordinal);
        int[]? byLevel = column is CodedColumn c ? new int[c.Levels.Length] : null;
        for (int i = 0; i < rows.Length; i++)
        {
            int row = rows[i];
            if (column.IsMissing(row))
            {
                codes[i] = names.Count;
                names.Add($"record {numbers[row]}");
                continue;
            }
            if (byLevel is not null)
            {
                var coded = (CodedColumn)column;
                ref int slot = ref byLevel[coded.Codes[row]];
                if (slot == 0)
                {
                    names.Add(coded.Levels[coded.Codes[row]]);
                    slot = names.Count;
                }
                codes[i] = slot - 1;
                continue;
            }
            string name = column.TextAt(row)!;
            if (!index.TryGetValue(name, out int code))
            {
                index.Add(name, code = names.Count);
                names.Add(name);
            }
            codes[i] = code;
        }
        return (codes, [.. names]);
    }
}
