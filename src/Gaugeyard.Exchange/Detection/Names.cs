using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Detection;

/// <summary>Makes every column's name distinct and present.</summary>
internal static class Names
{
    public static string[] Distinct(IReadOnlyList<string> written, int count, bool noHeader, List<Finding> findings)
    {
        var names = new string[count];
        var taken = new HashSet<string>(written.Where(n => n.Length > 0), StringComparer.Ordinal);
        var used = new HashSet<string>(StringComparer.Ordinal);
        for (int c = 0; c < count; c++)
        {
            string name = c < written.Count ? written[c] : "";
            if (name.Length == 0)
            {
                names[c] = Free($"Column {c + 1}", taken, used);
                if (!noHeader)
                    findings.Add(new Finding(Severity.Warning, names[c], null, $"column {c + 1} has no name in the file; it is called '{names[c]}'"));
            }
            else if (used.Contains(name))
            {
                names[c] = Free($"{name} 2", taken, used);
                findings.Add(new Finding(Severity.Warning, names[c], null, $"column {c + 1} is called '{name}' like an earlier column; it is renamed '{names[c]}'"));
            }
            else
                names[c] = name;
            used.Add(names[c]);
        }
        return names;
    }

    private static string Free(string wanted, HashSet<string> taken, HashSet<string> used)
    {
        if (!taken.Contains(wanted) && !used.Contains(wanted))
            return wanted;
        string stem = wanted.EndsWith(" 2", StringComparison.Ordinal) ? wanted[..^2] : wanted;
        for (int k = 2; ; k++)
            if (!taken.Contains($"{stem} {k}") && !used.Contains($"{stem} {k}"))
                return $"{stem} {k}";
    }
}
