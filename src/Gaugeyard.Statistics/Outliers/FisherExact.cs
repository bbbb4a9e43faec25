namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// Fisher's exact test of a 2 x 2 table (Fisher 1935, "The logic of inductive inference", J. R. Stat. Soc. 98:39-82): with both
/// margins fixed the count follows the hypergeometric distribution. Two-sided in the usual sense: all tables that are no more
/// probable than the one seen.
/// </summary>
public static class FisherExact
{
    // tables whose probability is equal but for rounding count as equally probable
    private const double Equal = 1 + 1e-7;

    /// <summary>
    /// Two-sided p-value. O(smallest margin); probabilities are taken relative to the most probable table by exact ratios, so
    /// that nothing overflows and tails down to 1e-300 keep their digits.
    /// </summary>
    /// <param name="a">Row 1, column 1.</param>
    /// <param name="b">Row 1, column 2.</param>
    /// <param name="c">Row 2, column 1.</param>
    /// <param name="d">Row 2, column 2.</param>
    /// <exception cref="ArgumentOutOfRangeException">A count is negative.</exception>
    public static double TwoSided(int a, int b, int c, int d)
    {
        ArgumentOutOfRangeException.ThrowIfNegative(a);
        ArgumentOutOfRangeException.ThrowIfNegative(b);
        ArgumentOutOfRangeException.ThrowIfNegative(c);
        ArgumentOutOfRangeException.ThrowIfNegative(d);
        long row1 = (long)a + b, row2 = (long)c + d, column1 = (long)a + c, all = row1 + row2;
        long low = Math.Max(0, column1 - row2), high = Math.Min(column1, row1);
        if (low == high)
            return 1;
        long mode = Math.Clamp((long)(((double)row1 + 1) * (column1 + 1) / (all + 2)), low, high);

        // weight(x+1)/weight(x) = (row1-x)(column1-x) / ((x+1)(row2-column1+x+1))
        double Rise(long x) => (double)(row1 - x) * (column1 - x) / ((double)(x + 1) * (row2 - column1 + x + 1));

        double seen = 1;
        for (long x = mode; x < a; x++)
            seen *= Rise(x);
        for (long x = mode; x > a; x--)
            seen /= Rise(x - 1);

        double total = 0, tail = 0;
        void Take(double weight)
        {
            total += weight;
            if (weight <= seen * Equal)
                tail += weight;
        }

        Take(1);
        double w = 1;
        for (long x = mode; x < high; x++)
        {
            w *= Rise(x);
            if (w == 0)
                break;
            Take(w);
        }
        w = 1;
        for (long x = mode; x > low; x--)
        {
            w /= Rise(x - 1);
            if (w == 0)
                break;
            Take(w);
        }
        return Math.Min(1, tail / total);
    }
}
