using ClosedXML.Excel;
using Gaugeyard.Exchange.Text;

namespace Gaugeyard.Exchange.Spreadsheets;

/// <summary>
/// Results of formulas that a workbook stores without results, as programs write them that do not calculate. Without this
/// their cells would read as missing. Calculated by the spreadsheet library, for workbooks of ordinary size.
/// </summary>
internal sealed class FormulaResults
{
    /// <summary>Bytes of unpacked workbook up to which formulas are calculated; the library holds the whole workbook in memory.</summary>
    private const long MostBytes = 48L << 20;

    private readonly Dictionary<(string Sheet, int Row, int Column), object> _results = [];

    /// <summary>Formulas that could not be calculated.</summary>
    public int Failed { get; private set; }

    public int Calculated => _results.Count;

    public bool TryGet(string sheet, int row, int column, out object value) => _results.TryGetValue((sheet, row, column), out value!);

    /// <summary>Calculates a workbook's formulas that have no result.</summary>
    /// <param name="file">The workbook, already within its limits.</param>
    /// <param name="count">How many such formulas there are.</param>
    /// <param name="unpacked">Bytes it unpacks to.</param>
    /// <param name="cancellationToken">Stops the work between cells.</param>
    public static FormulaResults Of(ArrivingFile file, int count, long unpacked, CancellationToken cancellationToken)
    {
        var results = new FormulaResults();
        if (unpacked > MostBytes)
        {
            results.Failed = count;
            return results;
        }
        try
        {
            using var stream = file.Open();
            using var workbook = new XLWorkbook(stream, XLEventTracking.Disabled);
            foreach (var sheet in workbook.Worksheets)
                foreach (var cell in sheet.CellsUsed(c => c.HasFormula))
                {
                    cancellationToken.ThrowIfCancellationRequested();
                    // a stored result is what the file says; it is never calculated again
                    if (cell.CachedValue is null or "")
                        results.Calculate(sheet.Name, cell);
                }
        }
        catch (Exception e) when (e is not (OperationCanceledException or OutOfMemoryException))
        {
            results.Failed = Math.Max(1, count - results.Calculated);
        }
        return results;
    }

    private void Calculate(string sheet, IXLCell cell)
    {
        try
        {
            object? value = cell.Value switch
            {
                double number when double.IsFinite(number) => number,
                bool or DateTime => cell.Value,
                string { Length: > 0 } text => text,
                TimeSpan span => span,
                IConvertible other and not string => Convert.ToDouble(other, System.Globalization.CultureInfo.InvariantCulture),
                _ => null,
            };
            if (value is not null)
                _results[(sheet, cell.Address.RowNumber, cell.Address.ColumnNumber - 1)] = value;
        }
        catch (Exception e) when (e is not OutOfMemoryException)
        {
            Failed++;
        }
    }
}
