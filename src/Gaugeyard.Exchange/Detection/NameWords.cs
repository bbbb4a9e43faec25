namespace Gaugeyard.Exchange.Detection;

/// <summary>Splits a column's name into lower-case words at blanks, punctuation and changes of case.</summary>
internal static class NameWords
{
    public static IReadOnlyList<string> Split(string name)
    {
        var words = new List<string>();
        int start = -1;
        for (int i = 0; i <= name.Length; i++)
        {
            bool letter = i < name.Length && (char.IsLetterOrDigit(name[i]));
            bool hump = letter && start >= 0 && char.IsUpper(name[i]) && char.IsLower(name[i - 1]);
            if (start >= 0 && (!letter || hump))
            {
                words.Add(name[start..i].ToLowerInvariant());
                start = -1;
            }
            if (letter && start < 0)
                start = i;
        }
        return words;
    }
}
