namespace Gaugeyard.Portal.Plots;

/// <summary>Counts of points in small squares: what is drawn where single points would cover each other.</summary>
public static class Density
{
    /// <summary>From how many points on squares are drawn instead of points.</summary>
    public const int From = 3000;

    /// <summary>Squares with at least one point: corner in px and share of the fullest square (root scale).</summary>
    public static IReadOnlyList<(double X, double Y, double Share)> Of(IEnumerable<(double X, double Y)> points, double size)
    {
        var counts = new Dictionary<(int, int), int>();
        foreach (var (x, y) in points)
        {
            var key = ((int)Math.Floor(x / size), (int)Math.Floor(y / size));
            counts[key] = counts.GetValueOrDefault(key) + 1;
        }
        double most = counts.Count == 0 ? 1 : counts.Values.Max();
        return [.. counts.Select(c => (c.Key.Item1 * size, c.Key.Item2 * size, Math.Sqrt(c.Value / most)))];
    }
}
