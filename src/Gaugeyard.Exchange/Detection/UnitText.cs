using Gaugeyard.Records.Units;

namespace Gaugeyard.Exchange.Detection;

/// <summary>Finds the unit that a heading, a unit row or the text after a number names.</summary>
internal static class UnitText
{
    // spellings that need no conversion in the portal but are units beyond doubt
    private static readonly Dictionary<string, string> Other = new(StringComparer.Ordinal)
    {
        ["km/h"] = "km/h",
        ["kmh"] = "km/h",
        ["kph"] = "km/h",
        ["mph"] = "mph",
        ["m/s"] = "m/s",
        ["ms"] = "m/s",
        ["m"] = "m",
        ["mm"] = "mm",
        ["cm"] = "cm",
        ["m2"] = "m²",
        ["m²"] = "m²",
        ["s"] = "s",
        ["sec"] = "s",
        ["min"] = "min",
        ["h"] = "h",
        ["hr"] = "h",
        ["%"] = "%",
        ["pct"] = "%",
        ["percent"] = "%",
        ["hp"] = "hp",
        ["PS"] = "PS",
        ["cc"] = "cm³",
        ["cm3"] = "cm³",
        ["cm³"] = "cm³",
        ["ml"] = "mL",
        ["mL"] = "mL",
        ["rpm"] = "rpm",
        ["1/min"] = "rpm",
        ["N"] = "N",
        ["Nm"] = "N·m",
        ["N·m"] = "N·m",
        ["dB"] = "dB",
        ["db"] = "dB",
        ["dB(A)"] = "dB(A)",
        ["V"] = "V",
        ["A"] = "A",
        ["Ah"] = "Ah",
        ["Hz"] = "Hz",
        ["kWh"] = "kWh",
        ["kwh"] = "kWh",
        ["Wh"] = "Wh",
        ["MJ"] = "MJ",
        ["kJ"] = "kJ",
        ["t"] = "t",
        ["g"] = "g",
        ["hPa"] = "hPa",
        ["mbar"] = "mbar",
        ["Pa"] = "Pa",
        ["deg"] = "°",
        ["°"] = "°",
        ["K"] = "K",
        ["lbs"] = "lb",
        ["in"] = "in",
        ["ft"] = "ft",
        ["yr"] = "a",
        ["g/kWh"] = "g/kWh",
        ["kg/m3"] = "kg/m³",
        ["kg/m³"] = "kg/m³",
        ["kg/L"] = "kg/L",
        ["gal"] = "gal",
        ["mpg"] = "mpg",
        ["MPG"] = "mpg",
        ["1"] = "1",
        ["-"] = "1",
        ["gco2/km"] = "g/km",
        ["g CO2/km"] = "g/km",
        ["g CO₂/km"] = "g/km",
        ["l/100 km"] = "L/100km",
        ["°C"] = "°C",
        ["º C"] = "°C",
        ["ºC"] = "°C",
        ["° C"] = "°C",
        ["° F"] = "°F",
        ["l"] = "L",
        ["kw"] = "kW",
        ["kpa"] = "kPa",
        ["C"] = "°C",
        ["F"] = "°F",
        ["liters/100 km"] = "L/100km",
        ["litres/100 km"] = "L/100km",
        ["mi/gal"] = "mpg",
        ["miles/gallon"] = "mpg",
        ["miles per gallon"] = "mpg",
    };

    /// <summary>Whether a text is a unit on its own.</summary>
    public static bool IsUnit(string text) => Find(text) is not null;

    /// <summary>The unit's code or usual spelling; "mpg" where the gallon is open; null when the text is no unit.</summary>
    public static string? Find(string text)
    {
        string wanted = Blanks.Trim(text).Normal();
        if (wanted.Length is 0 or > 24)
            return null;
        if (wanted.Length == 1 && !Other.ContainsKey(wanted) && wanted is not ("L" or "l"))
            return null;
        if (Other.TryGetValue(wanted, out string? other))
            return other;
        if (Unit.Find(wanted) is { } known)
            return known.Code;
        return wanted.Contains('/', StringComparison.Ordinal) && Other.TryGetValue(wanted.Replace(" ", "", StringComparison.Ordinal), out other) ? other
            : Unit.Find(wanted.Replace(" ", "", StringComparison.Ordinal))?.Code ?? (wanted.Length > 2 && Other.TryGetValue(wanted.ToLowerInvariant(), out other) ? other : null);
    }

    /// <summary>The text inside a unit row's cell, without brackets.</summary>
    public static string Bare(string cell)
    {
        string text = Blanks.Trim(cell);
        return text.Length > 2 && (text[0], text[^1]) is ('[', ']') or ('(', ')') or ('<', '>') ? Blanks.Trim(text[1..^1]) : text;
    }

    /// <summary>The unit that a heading carries: "[L/100 km]", "(kg)", ", km", "_kPa", or the whole of "l_per_100km".</summary>
    public static (string? Unit, string How) FromHeading(string name)
    {
        string text = Blanks.Trim(name);
        if (text.EndsWith(']') && text.LastIndexOf('[') is >= 0 and var square)
        {
            string inside = Blanks.Trim(text[(square + 1)..^1]);
            if (inside.Length > 0)
                return (Find(inside) ?? inside, $"the heading says [{inside}]");
        }
        if (text.EndsWith(')') && text.LastIndexOf(" (", StringComparison.Ordinal) is > 0 and var round && Find(text[(round + 2)..^1]) is { } bracketed)
            return (bracketed, $"the heading says {text[(round + 1)..]}");
        if (text.EndsWith(')') && text.LastIndexOf('(') is > 0 and var tight && Find(text[(tight + 1)..^1]) is { } close)
            return (close, $"the heading says {text[tight..]}");
        if (text.LastIndexOf(", ", StringComparison.Ordinal) is > 0 and var comma && Find(text[(comma + 2)..]) is { } listed && text.Length - comma > 3)
            return (listed, $"the heading ends in {text[(comma + 2)..]}");
        if (text.LastIndexOf(" in ", StringComparison.Ordinal) is > 0 and var within && Find(text[(within + 4)..]) is { } said)
            return (said, $"the heading ends in {text[(within + 4)..]}");
        if (text.Contains('/', StringComparison.Ordinal) && Find(text) is { } whole)
            return (whole, "the heading is a unit");
        // "Distance km"; a bar may also be what holds a trailer
        if (text.LastIndexOf(' ') is > 0 and var blank && text.Length - blank > 2 && Unit.Find(text[(blank + 1)..]) is { Code: not "bar" } trailing)
            return (trailing.Code, $"the heading ends in {text[(blank + 1)..]}");
        var words = NameWords.Split(text);
        string joined = string.Join('_', words);
        if (words.Contains("mpg"))
        {
            if (words.Contains("us"))
                return ("mi/gal-us", "the heading says mpg US");
            if (words.Contains("uk") || words.Contains("imp") || words.Contains("imperial"))
                return ("mi/gal-imp", "the heading says imperial mpg");
            return ("mpg", "the heading says mpg");
        }
        foreach (var (ending, unit) in Endings)
            if (joined == ending || joined.EndsWith("_" + ending, StringComparison.Ordinal))
                return (unit, $"the heading ends in {ending}");
        if (words.Count > 1 && text.Contains('_', StringComparison.Ordinal))
        {
            string last = text[(text.LastIndexOf('_') + 1)..];
            bool litres = last is "l" or "L" && words.Any(w => w is "fuel" or "displacement" or "volume" or "tank" or "capacity" or "engine");
            bool degrees = last is "c" or "C" or "f" or "F" && words.Any(w => w is "temp" or "temperature" or "ambient" or "t" or "oil" or "coolant" or "air");
            if (litres)
                return ("L", "the heading ends in l");
            if (degrees)
                return (last is "c" or "C" ? "°C" : "°F", $"the heading ends in {last}");
            if (last.Length > 1 && last is not ("in" or "ms" or "min" or "deg" or "sec" or "hr") && Find(last) is { } suffix)
                return (suffix, $"the heading ends in {last}");
            if (last is "ms" && words.Contains("wind"))
                return ("m/s", "the heading ends in ms");
        }
        return (null, "");
    }

    private static readonly (string Ending, string Unit)[] Endings =
    [
        ("l_per_100km", "L/100km"), ("l_per_100_km", "L/100km"), ("l_100km", "L/100km"), ("l_100_km", "L/100km"), ("l100km", "L/100km"), ("lp100km", "L/100km"),
        ("kwh_per_100km", "kWh/100km"), ("kwh_per_100_km", "kWh/100km"), ("kwh_100km", "kWh/100km"), ("kwh_100_km", "kWh/100km"), ("kwh100km", "kWh/100km"),
        ("wh_per_km", "Wh/km"), ("wh_km", "Wh/km"), ("wh_per_mi", "Wh/mi"), ("wh_mi", "Wh/mi"), ("mi_per_kwh", "mi/kWh"), ("mi_kwh", "mi/kWh"), ("km_per_kwh", "km/kWh"), ("km_kwh", "km/kWh"),
        ("km_per_l", "km/L"), ("km_l", "km/L"), ("kmpl", "km/L"), ("g_per_km", "g/km"), ("g_km", "g/km"), ("gco2_km", "g/km"), ("km_per_h", "km/h"), ("km_h", "km/h"), ("m_s", "m/s"), ("deg_c", "°C"), ("degc", "°C"), ("deg_f", "°F"), ("degf", "°F"),
    ];
}
