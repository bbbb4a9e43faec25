using System.Globalization;
using System.Runtime.CompilerServices;
using System.Runtime.InteropServices;

namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// The cells of one column as they stand in the file, before anyone decides what they mean. Plain numbers are parsed at
/// once; every other text goes into a dictionary, so that kinds, dates, missing codes and footnotes are judged once per
/// distinct text and with counts over the whole file. Nothing is lost: a plain number whose text a double would not give
/// back ("1.50") is counted, and the column is read again as text when it turns out not to be numbers.
/// </summary>
internal sealed class RawColumn
{
    // a text cell is a quiet NaN with the text's code in its low 32 bits; a number cell is the number
    private const long TextBits = 0x7FF8_0001_0000_0000;

    /// <summary>Code of the empty text.</summary>
    public const int Empty = 0;

    private readonly List<string> _texts = [""];
    private readonly List<int> _counts = [0];
    private readonly List<int> _firstRows = [-1];
    private readonly Dictionary<string, int> _index = new(StringComparer.Ordinal) { [""] = Empty };
    private readonly Dictionary<string, int>.AlternateLookup<ReadOnlySpan<char>> _lookup;
    private double[] _cells;

    public RawColumn(bool asText, char decimalMark, int capacity = 1024)
    {
        AsText = asText;
        DecimalMark = decimalMark;
        _cells = new double[capacity];
        _lookup = _index.GetAlternateLookup<ReadOnlySpan<char>>();
    }

    /// <summary>Whether numbers are kept as texts too.</summary>
    public bool AsText { get; }

    /// <summary>Decimal mark of the plain numbers that are parsed at once.</summary>
    public char DecimalMark { get; }

    /// <summary>Number of cells.</summary>
    public int Count { get; private set; }

    /// <summary>Number cells whose text would not come back from the number.</summary>
    public int Unrecoverable { get; private set; }

    /// <summary>Number cells with a decimal mark.</summary>
    public int Decimals { get; private set; }

    /// <summary>Number cells with exactly three digits after the mark and one to three before it, not starting with zero.</summary>
    public int ThreeDecimals { get; private set; }

    /// <summary>Number cells.</summary>
    public int Numbers { get; private set; }

    /// <summary>Distinct texts; the first is the empty one.</summary>
    public IReadOnlyList<string> Texts => _texts;

    /// <summary>Cells per text.</summary>
    public IReadOnlyList<int> Counts => _counts;

    /// <summary>Row of each text's first cell, from 0.</summary>
    public IReadOnlyList<int> FirstRows => _firstRows;

    /// <summary>The cells; see <see cref="IsText"/> and <see cref="CodeOf"/>.</summary>
    public ReadOnlySpan<double> Cells => _cells.AsSpan(0, Count);

    public static bool IsText(double cell) => double.IsNaN(cell);

    public static int CodeOf(double cell) => (int)BitConverter.DoubleToInt64Bits(cell);

    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public void Add(ReadOnlySpan<char> text)
    {
        if (text.IsEmpty)
        {
            AddBlank();
            return;
        }
        if (!AsText && PlainNumber.TryParse(text, DecimalMark, out double value, out var form))
        {
            Numbers++;
            if (form.Decimals > 0)
            {
                Decimals++;
                if (form.Decimals == 3 && form.WholeDigits is >= 1 and <= 3 && !form.StartsWithZero)
                    ThreeDecimals++;
            }
            if (!form.Recoverable)
                Unrecoverable++;
            Push(value);
            return;
        }
        if (!_lookup.TryGetValue(text, out int code))
            code = NewText(text.ToString());
        AddCode(code);
    }

    /// <summary>A number that a workbook holds as a number.</summary>
    public void AddNumber(double value)
    {
        if (AsText || !double.IsFinite(value))
        {
            Add(value.ToString("R", CultureInfo.InvariantCulture));
            return;
        }
        Numbers++;
        if (value != Math.Floor(value))
            Decimals++;
        Push(value);
    }

    public void AddBlank() => AddCode(Empty);

    /// <summary>Appends blanks up to a number of cells.</summary>
    public void PadTo(int count)
    {
        while (Count < count)
            AddBlank();
    }

    /// <summary>Appends the cells of a column of the same settings that follows this one in the file.</summary>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public void Append(RawColumn next)
    {
        var codes = new int[next._texts.Count];
        for (int i = 1; i < codes.Length; i++)
        {
            if (!_index.TryGetValue(next._texts[i], out int code))
            {
                code = _texts.Count;
                _texts.Add(next._texts[i]);
                _index.Add(next._texts[i], code);
                _counts.Add(0);
                _firstRows.Add(Count + next._firstRows[i]);
            }
            codes[i] = code;
            _counts[code] += next._counts[i];
        }
        _counts[Empty] += next._counts[Empty];
        if (_firstRows[Empty] < 0 && next._firstRows[Empty] >= 0)
            _firstRows[Empty] = Count + next._firstRows[Empty];
        Reserve(Count + next.Count);
        var from = next.Cells;
        var to = _cells.AsSpan(Count, from.Length);
        if (next.Numbers == next.Count)
            from.CopyTo(to);
        else
            for (int i = 0; i < from.Length; i++)
                to[i] = double.IsNaN(from[i]) ? BitConverter.Int64BitsToDouble(TextBits | (uint)codes[CodeOf(from[i])]) : from[i];
        Count += next.Count;
        Numbers += next.Numbers;
        Decimals += next.Decimals;
        ThreeDecimals += next.ThreeDecimals;
        Unrecoverable += next.Unrecoverable;
    }

    /// <summary>Empties the column for the next stretch of the file, keeping its memory.</summary>
    public void Clear()
    {
        Count = Numbers = Decimals = ThreeDecimals = Unrecoverable = 0;
        if (_texts.Count > 1)
        {
            _texts.RemoveRange(1, _texts.Count - 1);
            _counts.RemoveRange(1, _counts.Count - 1);
            _firstRows.RemoveRange(1, _firstRows.Count - 1);
            _index.Clear();
            _index.Add("", Empty);
        }
        _counts[Empty] = 0;
        _firstRows[Empty] = -1;
    }

    /// <summary>Cuts trailing cells off.</summary>
    public void Truncate(int count)
    {
        for (int row = count; row < Count; row++)
        {
            if (IsText(_cells[row]))
                _counts[CodeOf(_cells[row])]--;
            else
                Numbers--;
        }
        Count = Math.Min(Count, count);
    }

    /// <summary>Whether a cell is blank.</summary>
    public bool IsBlank(int row) => IsText(_cells[row]) && string.IsNullOrWhiteSpace(_texts[CodeOf(_cells[row])]);

    /// <summary>The text of a cell; for a number cell the number's shortest text with this column's mark.</summary>
    public string TextAt(int row) => IsText(_cells[row]) ? _texts[CodeOf(_cells[row])] : TextOf(_cells[row]);

    /// <summary>A number as the file most likely wrote it.</summary>
    public string TextOf(double value)
    {
        string text = PlainNumber.Text(value);
        return DecimalMark == '.' ? text : text.Replace('.', DecimalMark);
    }

    /// <summary>Hands the cells over for good as the values of a number column.</summary>
    /// <param name="valueOfText">Value by text code; NaN for missing.</param>
    /// <param name="codes">Text code by row, 0 at numbers and empty cells; null when every cell was a number or empty.</param>
    [MethodImpl(MethodImplOptions.AggressiveOptimization)]
    public double[] TakeCells(Func<int, double> valueOfText, out int[]? codes)
    {
        var values = _cells.Length == Count ? _cells : _cells.AsSpan(0, Count).ToArray();
        _cells = [];
        codes = null;
        if (Numbers == values.Length)
            return values;
        var byCode = new double[_texts.Count];
        for (int code = 0; code < byCode.Length; code++)
            byCode[code] = code == Empty ? double.NaN : valueOfText(code);
        if (_texts.Count > 1)
            codes = new int[values.Length];
        for (int i = 0; i < values.Length; i++)
            if (double.IsNaN(values[i]))
            {
                int code = CodeOf(values[i]);
                if (codes is not null)
                    codes[i] = code;
                values[i] = byCode[code];
            }
        return values;
    }

    private int NewText(string text)
    {
        int code = _texts.Count;
        _texts.Add(text);
        _counts.Add(0);
        _firstRows.Add(Count);
        _index.Add(text, code);
        return code;
    }

    private void AddCode(int code)
    {
        CollectionsMarshal.AsSpan(_counts)[code]++;
        if (code == Empty && _firstRows[Empty] < 0)
            _firstRows[Empty] = Count;
        Push(BitConverter.Int64BitsToDouble(TextBits | (uint)code));
    }

    private void Push(double cell)
    {
        if (Count == _cells.Length)
            Reserve(Count + 1);
        _cells[Count++] = cell;
    }

    private void Reserve(int count)
    {
        if (count > _cells.Length)
            Array.Resize(ref _cells, Math.Max(count, Math.Max(1024, _cells.Length < 1 << 20 ? _cells.Length * 2 : _cells.Length + _cells.Length / 4)));
    }
}
