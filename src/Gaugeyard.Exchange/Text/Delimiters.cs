namespace Gaugeyard.Exchange.Text;

/// <summary>Finds what separates the fields of a text file.</summary>
internal static class Delimiters
{
    private static readonly char[] Candidates = [',', ';', '\t', '|'];

    public static string Say(char delimiter) => delimiter switch
    {
        ',' => "commas",
        ';' => "semicolons",
        '\t' => "tabs",
        '|' => "pipes",
        ' ' => "blanks",
        _ => $"'{delimiter}'",
    };

    /// <summary>
    /// The candidate that splits the most lines into one and the same number of fields, at least two; where two do equally
    /// well the one with more fields. A text in which none does has one column.
    /// </summary>
    public static char Find(ReadOnlySpan<char> head)
    {
        char best = ',';
        double bestShare = 0;
        int bestFields = 1;
        var fields = new List<string>();
        foreach (char candidate in Candidates)
        {
            var counts = new Dictionary<int, int>();
            int lines = 0, plain = 0;
            var reader = new FieldReader(head, candidate, 1);
            while (lines < 400 && reader.Read(fields))
            {
                if (fields.All(string.IsNullOrWhiteSpace) && fields.Count == 1)
                    continue;
                lines++;
                counts[fields.Count] = counts.GetValueOrDefault(fields.Count) + 1;
                plain += fields.Count == 1 ? 1 : 0;
            }
            counts.Remove(1);
            if (counts.Count == 0)
                continue;
            var (width, times) = counts.OrderByDescending(c => c.Value).ThenByDescending(c => c.Key).First();
            double share = (double)times / lines;
            if (share > bestShare + 0.02 || share > bestShare - 0.02 && width > bestFields)
                (best, bestShare, bestFields) = (candidate, share, width);
        }
        return best;
    }
}
