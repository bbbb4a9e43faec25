namespace Gaugeyard.Statistics.Smoothing;

/// <summary>Figures of a local regression over its own records.</summary>
/// <param name="Fitted">Fitted value of each record.</param>
/// <param name="Hat">Diagonal of the operator.</param>
/// <param name="Trace">Sum of the diagonal, the equivalent number of parameters.</param>
/// <param name="Rss">Weighted residual sum of squares.</param>
/// <param name="Delta1">First moment of the residual operator; NaN when not asked for.</param>
/// <param name="Delta2">Second moment.</param>
/// <param name="S">Residual scale.</param>
public sealed record LocalStatistics(double[] Fitted, double[] Hat, double Trace, double Rss, double Delta1, double Delta2, double S)
{
    /// <summary>Degrees of freedom of pointwise t intervals.</summary>
    public double Df => Delta1 * Delta1 / Delta2;

    /// <summary>n RSS / (n - trace)^2 (Craven and Wahba 1979).</summary>
    public double Gcv => Fitted.Length * Rss / Math.Pow(Fitted.Length - Trace, 2);

    /// <summary>ln(RSS / n) + 1 + 2 (trace + 1) / (n - trace - 2) (Hurvich, Simonoff and Tsai 1998, JRSS B 60:271-293).</summary>
    public double Aicc => Fitted.Length - Trace - 2 > 0 ? Math.Log(Rss / Fitted.Length) + 1 + 2 * (Trace + 1) / (Fitted.Length - Trace - 2) : double.NaN;
}
