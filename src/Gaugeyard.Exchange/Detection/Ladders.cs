namespace Gaugeyard.Exchange.Detection;

/// <summary>Words that the trade puts in a known order, and words for yes and no.</summary>
internal static class Ladders
{
    private static readonly string[][] Known =
    [
        ["empty", "quarter", "half", "three-quarters", "three quarters", "full", "overloaded"],
        ["empty", "part", "partial", "half", "laden", "full"],
        ["unladen", "half", "half laden", "half-laden", "laden"],
        ["unladen", "half", "full"],
        ["none", "light", "medium", "heavy", "very heavy"],
        ["dry", "damp", "moist", "wet", "snow", "ice"],
        ["cold", "cool", "mild", "warm", "hot"],
        ["very low", "low", "medium", "high", "very high"],
        ["low", "mid", "high"],
        ["low", "moderate", "high"],
        ["none", "low", "medium", "high"],
        ["free", "light", "moderate", "dense", "jammed"],
        ["slow", "medium", "fast"],
        ["very poor", "poor", "fair", "good", "very good", "excellent"],
        ["bad", "fair", "good"],
        ["new", "part-worn", "part worn", "half-worn", "half worn", "worn"],
        ["never", "rarely", "sometimes", "often", "always"],
        ["xs", "s", "m", "l", "xl", "xxl"],
        ["small", "medium", "large"],
        ["leer", "halb", "voll"],
        ["trocken", "feucht", "nass"],
        ["kalt", "warm", "heiß"],
    ];

    /// <summary>The ladder that all the levels stand on, lowest first and in the levels' own spelling; null when there is none.</summary>
    public static IReadOnlyList<string>? Order(IReadOnlyCollection<string> levels)
    {
        if (levels.Count is < 2 or > 8)
            return null;
        foreach (string[] ladder in Known)
        {
            var ranks = levels.Select(l => Array.FindIndex(ladder, step => step.Equals(l, StringComparison.OrdinalIgnoreCase))).ToArray();
            if (ranks.All(r => r >= 0) && ranks.Distinct().Count() == ranks.Length)
                return [.. levels.Zip(ranks).OrderBy(p => p.Second).Select(p => p.First)];
        }
        return null;
    }

    private static readonly (string No, string Yes)[] Answers =
    [
        ("no", "yes"), ("n", "y"), ("false", "true"), ("off", "on"), ("nein", "ja"), ("non", "oui"), ("f", "t"), ("not passed", "passed"),
    ];

    /// <summary>Maps levels to no (0) and yes (1) where all of them are one usual pair; null otherwise.</summary>
    public static Func<string, int>? YesNo(IReadOnlyCollection<string> levels)
    {
        var lower = levels.Select(l => l.ToLowerInvariant()).ToHashSet(StringComparer.Ordinal);
        if (lower.Count == 0)
            return null;
        foreach (var (no, yes) in Answers)
            if (lower.All(l => l == no || l == yes) && (lower.Count == 2 || no.Length > 1 && (lower.Contains("yes") || lower.Contains("true") || lower.Contains("false") || no == "no")))
                return Answer;
        return lower.All(l => l is "yes" or "y" or "no" or "n" or "true" or "false") && lower.Count > 1 ? Answer : null;
    }

    /// <summary>0 for no, 1 for yes, -1 for anything else.</summary>
    public static int Answer(string text)
    {
        string lower = text.ToLowerInvariant();
        foreach (var (no, yes) in Answers)
        {
            if (lower == no)
                return 0;
            if (lower == yes)
                return 1;
        }
        return lower switch { "1" => 1, "0" => 0, "x" => 1, _ => -1 };
    }
}
