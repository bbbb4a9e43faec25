namespace Gaugeyard.Statistics.Outliers;

/// <summary>Order statistics without a full sort.</summary>
internal static class Selection
{
    /// <summary>
    /// The k-th smallest value (k from 0) by Hoare's quickselect with a median-of-three pivot; expected O(n). Reorders the span so that nothing before
    /// k is larger and nothing after it smaller.
    /// </summary>
    public static double Smallest(Span<double> values, int k)
    {
        int low = 0, high = values.Length - 1;
        while (high > low)
        {
            int mid = (low + high) >>> 1;
            double a = values[low], b = values[mid], c = values[high];
            double pivot = Math.Max(Math.Min(a, b), Math.Min(Math.Max(a, b), c));
            int i = low, j = high;
            while (i <= j)
            {
                while (values[i] < pivot)
                    i++;
                while (values[j] > pivot)
                    j--;
                if (i <= j)
                {
                    (values[i], values[j]) = (values[j], values[i]);
                    i++;
                    j--;
                }
            }
            if (k <= j)
                high = j;
            else if (k >= i)
                low = i;
            else
                break;
        }
        return values[k];
    }

    /// <summary>Median (mean of the two middle values when n is even); reorders the span; NaN for no values.</summary>
    public static double Median(Span<double> values)
    {
        int n = values.Length;
        if (n == 0)
            return double.NaN;
        double upper = Smallest(values, n / 2);
        if (n % 2 == 1)
            return upper;
        double lower = double.NegativeInfinity;
        foreach (double v in values[..(n / 2)])
            lower = Math.Max(lower, v);
        return lower + (upper - lower) / 2;
    }
}
