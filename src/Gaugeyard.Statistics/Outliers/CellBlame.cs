namespace Gaugeyard.Statistics.Outliers;

/// <summary>One cell that makes a record stand off.</summary>
/// <param name="Reading">Index of the reading.</param>
/// <param name="Expected">What the record's other, unsuspected readings make likely.</param>
/// <param name="Shift">How far the value lies from that, in conditional standard deviations.</param>
/// <param name="Spread">That standard deviation, in the reading's unit.</param>
public sealed record BlamedCell(int Reading, double Expected, double Shift, double Spread);

/// <summary>
/// Which cells of a record make it stand off: cells are left out one by one, each time the one whose removal lowers the squared distance most, until
/// what is left lies within the bound for as many readings. The distance splits exactly: leaving out cell j lowers it by the square of its conditional residual.
/// </summary>
public static class CellBlame
{
    /// <summary>
    /// Names the cells, worst first; at least one. O(p^4) per record.
    /// </summary>
    /// <param name="record">p values of one record.</param>
    /// <param name="center">Robust center.</param>
    /// <param name="covariance">Robust covariance, p x p.</param>
    /// <param name="within">Largest squared distance of an ordinary record by number of readings left, from 1 to p - 1; index 0 is not used.</param>
    /// <exception cref="ArgumentException">Lengths differ, or the covariance is not positive definite.</exception>
    public static IReadOnlyList<BlamedCell> Of(ReadOnlySpan<double> record, double[] center, double[,] covariance, double[] within)
    {
        int p = center.Length;
        if (record.Length != p)
            throw new ArgumentException($"record must have length {p} but has {record.Length}", nameof(record));
        var left = Enumerable.Range(0, p).ToList();
        var blamed = new List<int>();
        while (left.Count > 0)
        {
            double[] k = Precision(covariance, left);
            var d = left.Select(j => 0.0).ToArray();
            for (int a = 0; a < left.Count; a++)
                d[a] = record[left[a]] - center[left[a]];
            double total = 0, worst = -1;
            int at = 0;
            for (int a = 0; a < left.Count; a++)
            {
                double s = 0;
                for (int b = 0; b < left.Count; b++)
                    s += k[a * left.Count + b] * d[b];
                total += s * d[a];
                double drop = s * s / k[a * left.Count + a];
                if (drop > worst)
                    (worst, at) = (drop, a);
            }
            if (blamed.Count > 0 && total <= within[left.Count])
                break;
            blamed.Add(left[at]);
            left.RemoveAt(at);
        }
        var cells = new List<BlamedCell>(blamed.Count);
        foreach (int j in blamed)
        {
            var (expected, spread) = Conditional(record, center, covariance, j, left);
            cells.Add(new BlamedCell(j, expected, (record[j] - expected) / spread, spread));
        }
        return [.. cells.OrderByDescending(c => Math.Abs(c.Shift))];
    }

    /// <summary>Squared Mahalanobis distance of one record.</summary>
    /// <exception cref="ArgumentException">Lengths differ, or the covariance is not positive definite.</exception>
    public static double SquaredDistance(ReadOnlySpan<double> record, double[] center, double[,] covariance)
    {
        int p = center.Length;
        if (record.Length != p)
            throw new ArgumentException($"record must have length {p} but has {record.Length}", nameof(record));
        double[] k = Precision(covariance, [.. Enumerable.Range(0, p)]);
        double sum = 0;
        for (int a = 0; a < p; a++)
            for (int b = 0; b < p; b++)
                sum += (record[a] - center[a]) * k[a * p + b] * (record[b] - center[b]);
        return sum;
    }

    /// <summary>Mean and standard deviation of one reading given others.</summary>
    private static (double Mean, double Spread) Conditional(ReadOnlySpan<double> record, double[] center, double[,] covariance, int j, List<int> given)
    {
        List<int> with = [j, .. given];
        double[] k = Precision(covariance, with);
        double pull = 0;
        for (int b = 0; b < given.Count; b++)
            pull += k[b + 1] * (record[given[b]] - center[given[b]]);
        return (center[j] - pull / k[0], 1 / Math.Sqrt(k[0]));
    }

    private static double[] Precision(double[,] covariance, List<int> of)
    {
        int m = of.Count;
        // scaled to a correlation first, so that readings of very different size do not lose digits
        var scale = of.Select(j => Math.Sqrt(covariance[j, j])).ToArray();
        var r = new double[m * m];
        for (int a = 0; a < m; a++)
            for (int b = 0; b < m; b++)
                r[a * m + b] = covariance[of[a], of[b]] / (scale[a] * scale[b]);
        double[] inverse = SmallMatrix.Inverse(r, m) ?? throw new ArgumentException("the covariance must be positive definite", nameof(covariance));
        for (int a = 0; a < m; a++)
            for (int b = 0; b < m; b++)
                inverse[a * m + b] /= scale[a] * scale[b];
        return inverse;
    }
}
