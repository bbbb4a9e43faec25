using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>
/// What turns the scatter of a subset into a covariance: the consistency factor at the normal (Croux and Haesbroeck 1999, J. Multivar. Anal.
/// 71:161-190) and the factor for small samples (Pison, Van Aelst and Willems 2002, Metrika 55:111-123).
/// </summary>
internal static class McdFactors
{
    private static readonly double[] RawOneHalf = [0.262024211897096, 0.604756680630497], RawOneMost = [-0.351584646688712, 1.01646567502486];
    private static readonly double[] RawTwoHalf = [0.673292623522027, 0.691365864961895], RawTwoMost = [0.446537815635445, 1.06690782995919];
    private static readonly double[] NextOneHalf = [1.11098143415027, 1.5182890270453], NextOneMost = [-0.66046776772861, 0.88939595831888];
    private static readonly double[] NextTwoHalf = [3.11101712909049, 1.91401056721863], NextTwoMost = [0.79473550581058, 1.10081930350091];

    // for p >= 3: (a2, a3), (b2, b3) of the curves a/p^b through which c1 and c2 are found
    private static readonly double[][] RawHalf = [[-1.42764571687802, -1.06141115981725], [1.26263336932151, 1.28907991440387]];
    private static readonly double[][] RawMost = [[-0.455179464070565, -0.294241208320834], [1.11192541278794, 1.09649329149811]];
    private static readonly double[][] NextHalf = [[-1.02842572724793, -0.26800273450853], [1.67659883081926, 1.35968562893582]];
    private static readonly double[][] NextMost = [[-0.544482443573914, -0.343791072183285], [1.25994483222292, 1.25159004257133]];

    /// <summary>Number of records in the subset: floor(2 n2 - n + 2 (n - n2) alpha), n2 = floor((n + p + 1)/2).</summary>
    public static int SubsetSize(int n, int p, double alpha)
    {
        int n2 = (n + p + 1) / 2;
        return Math.Min(n, (int)Math.Floor(2 * n2 - n + 2 * (n - n2) * alpha));
    }

    /// <summary>a / F_chi2(p+2)(chi2_p;a) for a share a kept; 1 when all are kept.</summary>
    public static double Consistency(int p, double share) =>
        share >= 1 ? 1 : share / (1 - Probability.ChiSquareUpper(Quantiles.ChiSquare(share, p), p + 2));

    /// <summary>Factor of the raw scatter.</summary>
    public static double RawSmallSample(int n, int p, double alpha) => p switch
    {
        1 => Between(n, alpha, RawOneHalf, RawOneMost),
        2 => Between(n, alpha, RawTwoHalf, RawTwoMost),
        _ => Between(n, alpha, Curve(p, RawHalf), Curve(p, RawMost)),
    };

    /// <summary>Factor of the reweighted scatter.</summary>
    public static double ReweightedSmallSample(int n, int p, double alpha) => p switch
    {
        1 => Between(n, alpha, NextOneHalf, NextOneMost),
        2 => Between(n, alpha, NextTwoHalf, NextTwoMost),
        _ => Between(n, alpha, Curve(p, NextHalf), Curve(p, NextMost)),
    };

    private static double Between(int n, double alpha, double[] half, double[] most)
    {
        double f500 = 1 - Math.Exp(half[0]) / Math.Pow(n, half[1]), f875 = 1 - Math.Exp(most[0]) / Math.Pow(n, most[1]);
        double f = alpha <= 0.875 ? f500 + (f875 - f500) / 0.375 * (alpha - 0.5) : f875 + (1 - f875) / 0.125 * (alpha - 0.875);
        return 1 / f;
    }

    /// <summary>Solves ln(-a_k/p^b_k) = c1 - c2 ln(k p^2) for k = 2, 3.</summary>
    private static double[] Curve(int p, double[][] ab)
    {
        double y2 = Math.Log(-ab[0][0] / Math.Pow(p, ab[1][0])), y3 = Math.Log(-ab[0][1] / Math.Pow(p, ab[1][1]));
        double x2 = Math.Log(2.0 * p * p), x3 = Math.Log(3.0 * p * p);
        double c2 = (y2 - y3) / (x3 - x2);
        return [y2 + c2 * x2, c2];
    }
}
