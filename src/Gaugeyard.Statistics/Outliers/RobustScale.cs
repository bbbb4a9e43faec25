namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// Scales that a minority of wild values cannot move, all consistent for the standard deviation of normal data:
/// MAD (Hampel 1974), Sn and Qn (Rousseeuw and Croux 1993, J. Am. Stat. Assoc. 88:1273-1283), tau (Yohai and Zamar 1988; the form of
/// Maronna and Zamar 2002, Technometrics 44:307-317).
/// </summary>
public static class RobustScale
{
    /// <summary>Turns a median absolute deviation into a standard deviation of normal data.</summary>
    public const double MadConstant = 1.4826;

    private const double SnConstant = 1.1926, QnConstant = 2.21914;

    // Croux and Rousseeuw (1992), COMPSTAT 1:411-428: factors of Sn for n = 2..9
    private static readonly double[] SnSmall = [0.743, 1.851, 0.954, 1.351, 0.993, 1.198, 1.005, 1.131];

    // factors of Qn for n = 2..12 by simulation to five digits; n = 9 and 11, and the series below, agree with an independent library's results on open data
    private static readonly double[] QnSmall = [0.399356, 0.99365, 0.51321, 0.84401, 0.61220, 0.85877, 0.66993, 0.87344, 0.72014, 0.88906, 0.75743];

    /// <summary>Median; NaN for no values. O(n).</summary>
    public static double Median(ReadOnlySpan<double> values) => Selection.Median(values.ToArray());

    /// <summary>Median absolute deviation about the median times 1.4826; NaN for no values, 0 when more than half are equal. O(n).</summary>
    public static double Mad(ReadOnlySpan<double> values) => Mad(values, Median(values));

    /// <summary>Median absolute deviation about a given centre times 1.4826.</summary>
    public static double Mad(ReadOnlySpan<double> values, double center)
    {
        var distance = new double[values.Length];
        for (int i = 0; i < distance.Length; i++)
            distance[i] = Math.Abs(values[i] - center);
        return MadConstant * Selection.Median(distance);
    }

    /// <summary>
    /// Sn: the low median over i of the high median over j of |x_i - x_j|, times 1.1926. O(n log n) by binary search in the sorted values.
    /// </summary>
    /// <param name="values">Finite values; fewer than 2 give NaN.</param>
    /// <param name="corrected">Whether the factor for small samples is applied.</param>
    public static double Sn(ReadOnlySpan<double> values, bool corrected = true)
    {
        int n = values.Length;
        if (n < 2)
            return double.NaN;
        double[] x = values.ToArray();
        Array.Sort(x);
        var inner = new double[n];
        for (int i = 0; i < n; i++)
            inner[i] = Nearest(x, i, n / 2);
        double sn = SnConstant * Selection.Smallest(inner, (n + 1) / 2 - 1);
        double factor = !corrected ? 1 : n <= 9 ? SnSmall[n - 2] : n % 2 == 1 ? n / (n - 0.9) : 1;
        return sn * factor;
    }

    /// <summary>
    /// Qn: the k-th smallest of |x_i - x_j|, i &lt; j, with k = h(h-1)/2 and h = floor(n/2)+1, times 2.21914. O(n log n) by weighted medians of the rows of the
    /// sorted difference table (Johnson and Mizoguchi 1978, SIAM J. Comput. 7:147-153).
    /// </summary>
    /// <param name="values">Finite values; fewer than 2 give NaN.</param>
    /// <param name="corrected">Whether the factor for small samples is applied.</param>
    public static double Qn(ReadOnlySpan<double> values, bool corrected = true)
    {
        int n = values.Length;
        if (n < 2)
            return double.NaN;
        double[] x = values.ToArray();
        Array.Sort(x);
        long h = n / 2 + 1;
        double qn = QnConstant * SmallestDifference(x, h * (h - 1) / 2);
        return corrected ? qn * QnFactor(n) : qn;
    }

    /// <summary>Tau scale with constants 4.5 (location) and 3 (scale), O(n); 0 when the MAD is 0.</summary>
    public static double Tau(ReadOnlySpan<double> values) => TauWithLocation(values).Scale;

    /// <summary>Tau location and scale.</summary>
    internal static (double Location, double Scale) TauWithLocation(ReadOnlySpan<double> values)
    {
        double median = Median(values), mad = Mad(values, median) / MadConstant;
        if (!(mad > 0))
            return (median, 0);
        double sum = 0, weights = 0;
        foreach (double v in values)
        {
            double u = (v - median) / (4.5 * mad), w = Math.Abs(u) < 1 ? (1 - u * u) * (1 - u * u) : 0;
            sum += w * (v - median);
            weights += w;
        }
        double location = median + sum / weights, rho = 0;
        foreach (double v in values)
        {
            double u = (v - location) / mad;
            rho += Math.Min(u * u, 9);
        }
        // 0.67449^2 times the mean of min((z/0.67449)^2, 9) for a standard normal z, which makes the scale a standard deviation
        return (location, mad * Math.Sqrt(rho / (values.Length * 0.9247153921761311)));
    }

    private static double QnFactor(int n)
    {
        if (n <= 12)
            return QnSmall[n - 2];
        double r = 1.0 / n;
        return n % 2 == 1
            ? 1 / (1 + r * (1.60188 + r * (-2.1284 - 5.172 * r)))
            : 1 / (1 + r * (3.67561 + r * (1.9654 + r * (6.987 - 77 * r))));
    }

    /// <summary>The k-th smallest (k from 0) of |x_j - x_i| over all j including i itself, x sorted.</summary>
    private static double Nearest(double[] x, int i, int k)
    {
        // windows of k+1 values around i; the k-th distance is the smallest over windows of the larger end distance, and the left end distance falls as the window moves right
        int low = Math.Max(0, i - k), high = Math.Min(i, x.Length - 1 - k);
        while (low < high)
        {
            int start = (low + high) / 2;
            if (x[i] - x[start] > x[start + k] - x[i])
                low = start + 1;
            else
                high = start;
        }
        double best = Math.Max(x[i] - x[low], x[low + k] - x[i]);
        return low > Math.Max(0, i - k) ? Math.Min(best, Math.Max(x[i] - x[low - 1], x[low - 1 + k] - x[i])) : best;
    }

    /// <summary>The k-th smallest (k from 1) difference x_j - x_i, j > i, x sorted.</summary>
    private static double SmallestDifference(double[] x, long k)
    {
        int n = x.Length;
        // row i holds x[j]-x[i] for j = i+1..n-1, rising in j; first[i]..last[i] are the places still in question
        var first = new int[n];
        var last = new int[n];
        for (int i = 0; i < n; i++)
        {
            first[i] = i + 1;
            last[i] = n - 1;
        }
        long below = 0, open = (long)n * (n - 1) / 2;
        var medians = new double[n];
        var weights = new double[n];
        while (open > n)
        {
            int rows = 0;
            for (int i = 0; i < n; i++)
                if (first[i] <= last[i])
                {
                    medians[rows] = x[(first[i] + last[i]) >>> 1] - x[i];
                    weights[rows++] = last[i] - first[i] + 1;
                }
            double trial = WeightedMedian(medians, weights, rows);
            // places with a difference below, and not above, the trial
            long less = 0, notMore = 0;
            var cutLess = new int[n];
            var cutNotMore = new int[n];
            int a = 1, b = 1;
            for (int i = 0; i < n; i++)
            {
                a = Math.Max(a, i + 1);
                while (a < n && x[a] - x[i] < trial)
                    a++;
                b = Math.Max(b, a);
                while (b < n && x[b] - x[i] <= trial)
                    b++;
                cutLess[i] = a - 1;
                cutNotMore[i] = b;
                less += a - 1 - i;
                notMore += b - 1 - i;
            }
            if (k <= less)
            {
                for (int i = 0; i < n; i++)
                    last[i] = Math.Min(last[i], cutLess[i]);
            }
            else if (k > notMore)
            {
                for (int i = 0; i < n; i++)
                    first[i] = Math.Max(first[i], cutNotMore[i]);
            }
            else
            {
                return trial;
            }
            below = 0;
            open = 0;
            for (int i = 0; i < n; i++)
            {
                below += first[i] - i - 1;
                open += Math.Max(0, last[i] - first[i] + 1);
            }
        }
        var rest = new double[open];
        int count = 0;
        for (int i = 0; i < n; i++)
            for (int j = first[i]; j <= last[i]; j++)
                rest[count++] = x[j] - x[i];
        return Selection.Smallest(rest, (int)(k - below - 1));
    }

    private static double WeightedMedian(double[] values, double[] weights, int count)
    {
        double[] v = values[..count], w = weights[..count];
        Array.Sort(v, w);
        double half = 0, sum = 0;
        foreach (double x in w)
            half += x;
        half /= 2;
        for (int i = 0; i < count; i++)
        {
            sum += w[i];
            if (sum >= half)
                return v[i];
        }
        return v[count - 1];
    }
}
