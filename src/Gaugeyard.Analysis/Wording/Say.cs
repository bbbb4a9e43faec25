using System.Globalization;
using Gaugeyard.Records.Units;

namespace Gaugeyard.Analysis.Wording;

/// <summary>Numbers and lists as people of the trade read them: true minus, no break inside a unit, no more digits than tell something.</summary>
public static class Say
{
    /// <summary>A number with a fixed number of decimals.</summary>
    public static string Number(double value, int decimals)
    {
        if (!double.IsFinite(value))
            return "–";
        if (value != 0 && (Math.Abs(value) >= 1e9 || Math.Abs(value) < 1e-6))
            return value.ToString("0.###e0", CultureInfo.InvariantCulture).Replace('-', '\u2212');
        string text = Math.Round(value, Math.Min(decimals, 15), MidpointRounding.ToEven).ToString("N" + decimals, CultureInfo.InvariantCulture);
        return (text.Trim('-', '0', '.', ',').Length == 0 ? text.TrimStart('-') : text).Replace('-', '\u2212');
    }

    /// <summary>How many decimals make a spread or half-width readable with two figures.</summary>
    public static int DecimalsFor(double spread)
    {
        if (!double.IsFinite(spread) || spread == 0)
            return 2;
        return Math.Clamp(1 - (int)Math.Floor(Math.Log10(Math.Abs(spread))), 0, 6);
    }

    /// <summary>A value with its unit.</summary>
    public static string With(double value, int decimals, string? unit) => Number(value, decimals) + Unit(unit);

    /// <summary>A unit after a number, with its space; nothing when there is none.</summary>
    public static string Unit(string? unit)
    {
        string label = Records.Units.Unit.LabelOf(unit);
        return label.Length == 0 ? "" : "\u00a0" + label;
    }

    /// <summary>An interval.</summary>
    public static string Range(double low, double high, int decimals) => $"{Number(low, decimals)} to {Number(high, decimals)}";

    /// <summary>A count with its noun.</summary>
    public static string Count(int count, string one, string? many = null) =>
        count.ToString("N0", CultureInfo.InvariantCulture) + " " + (count == 1 ? one : many ?? one + "s");

    /// <summary>a, b and c.</summary>
    public static string List(IReadOnlyList<string> items, int most = 6)
    {
        if (items.Count > most)
            return string.Join(", ", items.Take(most)) + $" and {items.Count - most} more";
        return items.Count switch
        {
            0 => "",
            1 => items[0],
            _ => string.Join(", ", items.Take(items.Count - 1)) + " and " + items[^1],
        };
    }

    /// <summary>A share in per cent.</summary>
    public static string Percent(double share, int decimals = 0) => Number(100 * share, decimals) + "\u00a0%";

    /// <summary>A p-value.</summary>
    public static string P(double p) => !double.IsFinite(p) ? "–" : p < 0.0001 ? "p < 0.0001" : "p " + Number(p, p < 0.001 ? 5 : p < 0.01 ? 4 : 3);

    /// <summary>First letter large.</summary>
    public static string Sentence(string text) => text.Length == 0 ? text : char.ToUpperInvariant(text[0]) + text[1..];
}
