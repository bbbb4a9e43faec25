namespace Gaugeyard.Records.Units;

/// <summary>What a unit measures; only what the portal treats specially has its own entry.</summary>
public enum UnitFamily
{
    /// <summary>Energy or fuel per distance: averaged arithmetically.</summary>
    Consumption,

    /// <summary>Distance per fuel or energy: averaged as its reciprocal.</summary>
    Economy,

    /// <summary>Distance driven.</summary>
    Distance,

    /// <summary>Anything else.</summary>
    Other,
}

/// <summary>
/// A unit of a number column. Efficiency units carry the factor to their base: litres per 100 km for fuel, kWh per
/// 100 km for electricity, so that value in base = ToBase * x (consumption) or ToBase / x (economy).
/// </summary>
/// <param name="Code">As it stands in the HTTP interface and in files, for example "mi/gal-us".</param>
/// <param name="Label">As people read it, for example "mi/gal (US)".</param>
public sealed record Unit(string Code, string Label, UnitFamily Family, string? BaseCode, double ToBase)
{
    // Exact by definition: 1 US gallon = 231 cubic inches = 3.785411784 L; 1 imperial gallon = 4.54609 L; 1 mile = 1.609344 km
    // (NIST Handbook 44 appendix C; UK Units of Measurement Regulations 1995).
    private const double UsGallon = 3.785411784, ImperialGallon = 4.54609, Mile = 1.609344;

    /// <summary>The units the portal knows; anything else is kept as the file's own text.</summary>
    public static IReadOnlyList<Unit> Known { get; } =
    [
        new("L/100km", "L/100\u00a0km", UnitFamily.Consumption, "L/100km", 1),
        new("km/L", "km/L", UnitFamily.Economy, "L/100km", 100),
        new("mi/gal-us", "mi/gal (US)", UnitFamily.Economy, "L/100km", 100 * UsGallon / Mile),
        new("mi/gal-imp", "mi/gal (imperial)", UnitFamily.Economy, "L/100km", 100 * ImperialGallon / Mile),
        new("gal-us/100mi", "gal/100\u00a0mi (US)", UnitFamily.Consumption, "L/100km", UsGallon / Mile),
        new("kWh/100km", "kWh/100\u00a0km", UnitFamily.Consumption, "kWh/100km", 1),
        new("Wh/km", "Wh/km", UnitFamily.Consumption, "kWh/100km", 0.1),
        new("Wh/mi", "Wh/mi", UnitFamily.Consumption, "kWh/100km", 0.1 / Mile),
        new("km/kWh", "km/kWh", UnitFamily.Economy, "kWh/100km", 100),
        new("mi/kWh", "mi/kWh", UnitFamily.Economy, "kWh/100km", 100 / Mile),
        new("g/km", "g/km", UnitFamily.Consumption, "g/km", 1),
        new("km", "km", UnitFamily.Distance, "km", 1),
        new("mi", "mi", UnitFamily.Distance, "km", Mile),
        new("L", "L", UnitFamily.Other, "L", 1),
        new("kg", "kg", UnitFamily.Other, "kg", 1),
        new("lb", "lb", UnitFamily.Other, "kg", 0.45359237),
        new("kW", "kW", UnitFamily.Other, "kW", 1),
        new("kPa", "kPa", UnitFamily.Other, "kPa", 1),
        new("bar", "bar", UnitFamily.Other, "kPa", 100),
        new("psi", "psi", UnitFamily.Other, "kPa", 6.894757293168361),
        new("°C", "°C", UnitFamily.Other, null, 1),
        new("°F", "°F", UnitFamily.Other, null, 1),
    ];

    private static readonly Dictionary<string, string> Synonyms = new(StringComparer.OrdinalIgnoreCase)
    {
        ["l/100 km"] = "L/100km",
        ["l/100km"] = "L/100km",
        ["litres/100km"] = "L/100km",
        ["liter/100km"] = "L/100km",
        ["l per 100 km"] = "L/100km",
        ["kml"] = "km/L",
        ["km/l"] = "km/L",
        ["kmpl"] = "km/L",
        ["km per litre"] = "km/L",
        ["mpg us"] = "mi/gal-us",
        ["mpg (us)"] = "mi/gal-us",
        ["us mpg"] = "mi/gal-us",
        ["mpg-us"] = "mi/gal-us",
        ["mi/gal us"] = "mi/gal-us",
        ["mi/gal (us)"] = "mi/gal-us",
        ["mpg_us"] = "mi/gal-us",
        ["mpg imp"] = "mi/gal-imp",
        ["mpg (imp)"] = "mi/gal-imp",
        ["mpg uk"] = "mi/gal-imp",
        ["mpg (uk)"] = "mi/gal-imp",
        ["mi/gal (imperial)"] = "mi/gal-imp",
        ["mpg-imp"] = "mi/gal-imp",
        ["mi/gal imp"] = "mi/gal-imp",
        ["mpg_imp"] = "mi/gal-imp",
        ["kwh/100 km"] = "kWh/100km",
        ["degc"] = "°C",
        ["deg c"] = "°C",
        ["celsius"] = "°C",
        ["c"] = "°C",
        ["degf"] = "°F",
        ["deg f"] = "°F",
        ["fahrenheit"] = "°F",
        ["litre"] = "L",
        ["litres"] = "L",
        ["liter"] = "L",
        ["liters"] = "L",
        ["miles"] = "mi",
        ["mile"] = "mi",
    };

    /// <summary>The unit of a code or a usual spelling; null when the text names none (or only "mpg", where the gallon must be chosen).</summary>
    public static Unit? Find(string? text)
    {
        if (string.IsNullOrWhiteSpace(text))
            return null;
        string wanted = text.Trim().Replace('\u00a0', ' ');
        if (Synonyms.TryGetValue(wanted, out string? code))
            wanted = code;
        return Known.FirstOrDefault(u => u.Code == wanted) ?? Known.FirstOrDefault(u => u.Code.Equals(wanted, StringComparison.OrdinalIgnoreCase));
    }

    /// <summary>The label of a known unit, or the text itself.</summary>
    public static string LabelOf(string? text) => Find(text)?.Label ?? text ?? "";

    /// <summary>Whether the text is a distance per fuel or energy.</summary>
    public static bool IsEconomy(string? text) => Find(text)?.Family == UnitFamily.Economy;

    /// <summary>
    /// Turns an economy value into consumption in the base unit, or back: both are ToBase / x. For a consumption unit it
    /// scales into the base.
    /// </summary>
    public double ToBaseValue(double x) => Family == UnitFamily.Economy ? ToBase / x : ToBase * x;

    /// <summary>A value of the base unit in this unit.</summary>
    public double FromBaseValue(double x) => Family == UnitFamily.Economy ? ToBase / x : x / ToBase;
}
