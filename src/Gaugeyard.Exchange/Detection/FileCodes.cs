using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// Carries a missing code from the columns where it stands out to those where it happens to lie among the others: 9999 shows
/// itself among tyre pressures but not among odometer readings. It takes two columns that show it, or one and the lines above
/// the table that name it.
/// </summary>
internal static class FileCodes
{
    public static void Apply(List<ColumnReading> readings, ColumnChoice?[] choices, ReadChoices file, IReadOnlyList<HeadRow> above, RowMap rows)
    {
        if (file.MissingCodes is not null)
            return;
        var named = above.SelectMany(r => r.Cells).SelectMany(c => c.Split([' ', ',', ';', ':', '(', ')', '"', '\''])).ToHashSet(StringComparer.Ordinal);
        var shown = readings.SelectMany(r => r.FarCodes).GroupBy(v => v)
            .Where(g => g.Count() >= 2 || named.Contains(PlainNumber.Text(g.Key))).ToDictionary(g => g.Key, g => g.Count());
        if (shown.Count == 0)
            return;
        for (int k = 0; k < readings.Count; k++)
        {
            if (readings[k].Column is not NumberColumn column || choices[k]?.MissingCodes is not null)
                continue;
            var values = column.Values;
            var found = new SortedDictionary<double, (int First, int Count)>();
            for (int row = 0; row < values.Length; row++)
                if (shown.ContainsKey(values[row]))
                {
                    var (first, count) = found.GetValueOrDefault(values[row], (row, 0));
                    found[values[row]] = (first, count + 1);
                }
            if (found.Count == 0)
                continue;
            var changed = (double[])values.Clone();
            for (int row = 0; row < changed.Length; row++)
                if (found.ContainsKey(changed[row]))
                    changed[row] = double.NaN;
            var codes = column.Definition.MissingCodes.Concat(found.Keys.Select(PlainNumber.Text)).Distinct().ToList();
            foreach (var (code, (first, count)) in found)
                readings[k].Findings.Add(new Finding(Severity.Warning, column.Name, first + 1,
                    $"column {column.Name}: {PlainNumber.Text(code)} in {count:N0} {(count == 1 ? "cell" : "cells")} (first in row {rows[first]}) is read as missing, because it means that in {shown[code]:N0} other {(shown[code] == 1 ? "column" : "columns")}"));
            readings[k] = readings[k] with
            {
                Column = new NumberColumn(column.Definition with { MissingCodes = codes }, changed),
                Known = readings[k].Known - found.Values.Sum(f => f.Count),
            };
        }
    }
}
