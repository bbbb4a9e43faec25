using System.Text.RegularExpressions;
using ClosedXML.Excel;
using Gaugeyard.Exchange.Text;

namespace Gaugeyard.Exchange.Spreadsheets;

/// <summary>
/// Results of formulas that a workbook stores without results, as programs write them that do not calculate. Without this
/// their cells would read as missing. The spreadsheet library calculates them, and only where nothing can run away: few
/// formulas, plain arithmetic and the usual numeric functions, no text, ranges of bounded size, a stack of its own.
/// </summary>
internal sealed partial class FormulaResults
{
    private const long MostBytes = 16L << 20;
    private const int MostFormulas = 5_000, MostCharacters = 1_000, Stack = 64 << 20;
    private const long MostRangeCells = 2_000_000;

    private static readonly HashSet<string> Functions = new(StringComparer.OrdinalIgnoreCase)
    {
        "SUM", "AVERAGE", "MIN", "MAX", "MEDIAN", "COUNT", "ROUND", "ROUNDUP", "ROUNDDOWN", "ABS", "SQRT", "POWER", "EXP", "LN", "LOG10", "INT", "MOD", "IF", "AND", "OR", "NOT", "PI",
    };

    private readonly Dictionary<(string Sheet, int Row, int Column), object> _results = [];

    /// <summary>Formulas that have no result and were not calculated.</summary>
    public int Failed { get; private set; }

    /// <summary>Formulas that were calculated.</summary>
    public int Calculated => _results.Count;

    public bool TryGet(string sheet, int row, int column, out object value) => _results.TryGetValue((sheet, row, column), out value!);

    /// <summary>Calculates a workbook's formulas that have no result.</summary>
    /// <param name="file">The workbook, already within its limits.</param>
    /// <param name="bare">How many such formulas there are.</param>
    /// <param name="unpacked">Bytes it unpacks to.</param>
    /// <param name="cancellationToken">Stops the work between cells.</param>
    public static FormulaResults Of(ArrivingFile file, int bare, long unpacked, CancellationToken cancellationToken)
    {
        var results = new FormulaResults();
        if (unpacked <= MostBytes && bare <= MostFormulas)
        {
            // a chain of formulas is followed by recursion; a thread of its own has room for the longest that is let through
            var thread = new Thread(() => results.CalculateAll(file, cancellationToken), Stack);
            thread.Start();
            thread.Join();
        }
        cancellationToken.ThrowIfCancellationRequested();
        results.Failed = Math.Max(0, bare - results.Calculated);
        return results;
    }

    private void CalculateAll(ArrivingFile file, CancellationToken cancellationToken)
    {
        try
        {
            using var stream = file.Open();
            using var workbook = new XLWorkbook(stream, XLEventTracking.Disabled);
            var formulas = workbook.Worksheets.SelectMany(s => s.CellsUsed(c => c.HasFormula)).ToList();
            if (formulas.Count > MostFormulas || formulas.Sum(c => RangeCells(c.FormulaA1)) > MostRangeCells)
                return;
            foreach (var cell in formulas)
            {
                if (cancellationToken.IsCancellationRequested)
                    return;
                // a stored result is what the file says; it is never calculated again
                if (cell.CachedValue is null or "" && Value(cell) is { } value)
                    _results[(cell.Worksheet.Name, cell.Address.RowNumber, cell.Address.ColumnNumber - 1)] = value;
            }
        }
        catch (Exception e) when (e is not OutOfMemoryException)
        {
            // whatever the library says about a damaged workbook, its formulas simply stay without a result
            _results.Clear();
        }
    }

    private static object? Value(IXLCell cell)
    {
        try
        {
            return cell.Value switch
            {
                double number => double.IsFinite(number) ? number : null,
                bool yes => yes,
                DateTime date => date,
                int whole => (double)whole,
                _ => null,
            };
        }
        catch (Exception e) when (e is not OutOfMemoryException)
        {
            return null;
        }
    }

    /// <summary>Cells that a formula's ranges cover; beyond every bound when the formula is not of the plain sort.</summary>
    internal static long RangeCells(string formula)
    {
        if (formula.Length > MostCharacters || !Plain().IsMatch(formula))
            return long.MaxValue / MostFormulas / 2;
        foreach (Match call in Call().Matches(formula))
            if (!Functions.Contains(call.Groups[1].Value))
                return long.MaxValue / MostFormulas / 2;
        long cells = 0;
        int colons = 0;
        foreach (Match range in Range().Matches(formula))
        {
            colons++;
            long rows = Math.Abs(long.Parse(range.Groups[2].Value) - long.Parse(range.Groups[4].Value)) + 1;
            cells += rows * (Math.Abs(Column(range.Groups[1].Value) - Column(range.Groups[3].Value)) + 1);
        }
        // a colon that is no bounded range names whole columns or rows
        return colons == formula.Count(c => c == ':') ? cells : long.MaxValue / MostFormulas / 2;
    }

    private static int Column(string letters) => letters.Aggregate(0, (n, c) => n * 26 + (char.ToUpperInvariant(c) - 'A' + 1));

    [GeneratedRegex(@"^[A-Za-z0-9$.,:;+\-*/^()<>= !%_]*$", RegexOptions.NonBacktracking)]
    private static partial Regex Plain();

    [GeneratedRegex(@"([A-Za-z_][A-Za-z0-9_.]*)\s*\(")]
    private static partial Regex Call();

    [GeneratedRegex(@"\$?([A-Za-z]{1,3})\$?([0-9]{1,7}):\$?([A-Za-z]{1,3})\$?([0-9]{1,7})")]
    private static partial Regex Range();
}
