namespace Gaugeyard.Exchange.Detection;

/// <summary>What a column's name gives away about its use.</summary>
internal static class NameClues
{
    private static readonly string[] Key = ["id", "ids", "no", "nr", "num", "number", "code", "key", "label", "ref", "tag", "name", "plate", "reg", "registration", "identifier", "#", "nummer", "kennung"];
    private static readonly string[] VehicleWords = ["vehicle", "veh", "vehicles", "vin", "fahrzeug", "car", "truck", "fleet", "unit"];
    private static readonly string[] RunWords = ["run", "runs", "test", "record", "sample", "trial", "lauf", "versuch", "messung", "case", "experiment"];

    /// <summary>The name speaks of the vehicle itself, not of a property of it.</summary>
    public static bool Vehicle(IReadOnlyList<string> words) =>
        words.Count > 0 && words.Any(w => VehicleWords.Contains(w)) && words.All(w => VehicleWords.Contains(w) || Key.Contains(w)) && !(words.Count == 1 && words[0] is "unit" or "fleet")
        || words.Count == 1 && words[0] is "vehicleid" or "vehid" or "carid" or "fahrgestellnummer";

    /// <summary>The name speaks of the run.</summary>
    public static bool Run(IReadOnlyList<string> words) =>
        words.Count > 0 && words.Any(w => RunWords.Contains(w) || w is "runid" or "testid" or "runname") && words.All(w => RunWords.Contains(w) || Key.Contains(w) || w is "runid" or "testid" or "runname");

    /// <summary>The name says that numbers in the column are codes.</summary>
    public static bool Code(IReadOnlyList<string> words) =>
        words.Count > 0 && (words[^1] is "id" or "ids" or "no" or "nr" or "num" or "number" or "code" or "codes" or "route" or "driver" or "operator" or "vin" or "plate" or "serial" or "postcode" or "zip" or "identifier"
            or "vehicleid" or "runid" or "testid" or "driverid" or "routeid" || words[0] is "vin" || words.Contains("route") && words.Count <= 2 && !words.Contains("length") && !words.Contains("distance")
            || Vehicle(words));

    public static bool Note(IReadOnlyList<string> words) =>
        words.Any(w => w is "remark" or "remarks" or "note" or "notes" or "comment" or "comments" or "bemerkung" or "bemerkungen" or "observation" or "observations" or "description");

    public static bool Date(IReadOnlyList<string> words) => words.Any(w => w is "date" or "datum" or "timestamp" or "datetime" or "testdate" or "rundate");

    /// <summary>Distance driven in a run; an odometer is a property of the vehicle.</summary>
    public static bool Distance(IReadOnlyList<string> words) =>
        words.Any(w => w is "distance" or "dist" or "trip" or "driven" or "strecke") && !words.Any(w => w is "odometer" or "odo" or "per" or "braking" or "stopping");

    public static bool Reading(IReadOnlyList<string> words) =>
        words.Any(w => w is "consumption" or "economy" or "mpg" or "fc" or "l100km" or "verbrauch" or "co2" or "emissions" or "kmpl" or "efficiency") || words.Contains("fuel") && words.Contains("used");

    /// <summary>City and highway alone mean consumption when the column holds numbers.</summary>
    public static bool CityOrHighway(IReadOnlyList<string> words) => words.Any(w => w is "city" or "highway" or "urban" or "motorway" or "combined") && !words.Any(w => w is "distance" or "speed" or "share" or "time" or "km" or "date" or "temp");
}
