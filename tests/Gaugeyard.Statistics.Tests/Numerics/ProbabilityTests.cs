using Gaugeyard.Statistics.Numerics;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Numerics;

/// <summary>
/// Tails against own computation with mpmath at 40 to 60 digits (density integrated piece by piece, or the hypergeometric series of
/// the incomplete beta function), arguments taken as the doubles they are.
/// </summary>
public sealed class ProbabilityTests
{
    public static TheoryData<double, double, double> Student => new()
    {
        { 0.01, 3, 4.963245557064259907e-1 },
        { 1.2, 3, 1.5813105734905261247e-1 },
        { 5, 100, 1.2250867067519002115e-6 },
        { 9, 100, 7.6803852573752068501e-15 },
        { 30, 1000, 7.6873437220217411056e-142 },
        { 2, 1e6, 2.2750266925659604211e-2 },
        { 5, 1e6, 2.8669989354453707845e-7 },
        { 30, 1e6, 6.0100471168317189413e-198 },
        { 1.96, 1e9, 2.4997895286864797548e-2 },
        { 40, 5, 9.2059810858864771776e-8 },
        { 1e6, 2.5, 7.1933971908142384634e-16 },
        { 0.5, 0.7, 3.6520084334116501239e-1 },
        { 6, 30.5, 6.5358299095173623809e-7 },
        { 3.3, 17, 2.1150487018628330182e-3 },
    };

    public static TheoryData<double, double, double, double> Fisher => new()
    {
        { 1.5, 3, 20, 2.4505201159396706329e-1 },
        { 0.01, 3, 20, 9.9858167601910103521e-1 },
        { 50, 3, 20, 1.7760683360454812196e-9 },
        { 1.02, 4000, 5000, 2.5417834507623852324e-1 },
        { 1.1, 4000, 5000, 7.2889100289490859516e-4 },
        { 3, 2, 1e6, 4.9787516451703293546e-2 },
        { 20, 5, 1e6, 5.2976017698675107171e-20 },
        { 1.7, 8, 18000, 9.2889465910667366291e-2 },
        { 21.03, 8, 1891, 8.04856775542332868e-31 },
        { 10000.0, 1, 5, 1.8960014224623627389e-9 },
        { 2.5, 1.5, 7.25, 1.538095379426136345e-1 },
    };

    public static TheoryData<double, double, double> ChiSquare => new()
    {
        { 1, 1, 3.1731050786291410283e-1 },
        { 100, 1, 1.5239706048321052132e-23 },
        { 1000, 3, 1.7994208765314476631e-216 },
        { 0.001, 5, 9.9999999831851228103e-1 },
        { 1050, 1000, 1.324740568214770765e-1 },
        { 1400, 1000, 7.0321456418285894787e-16 },
        { 1003000, 1000000, 1.7016772933266315089e-2 },
        { 700, 200, 1.0799008957302861704e-56 },
        { 3.3, 2.7, 2.9915113378416088474e-1 },
    };

    public static TheoryData<double, double> Normal => new()
    {
        { -38, 2.8854283600687843084e-316 },
        { -20, 2.7536241186062336951e-89 },
        { -8.3, 5.2055697448902540246e-17 },
        { -3, 1.3498980316300945267e-3 },
        { -1, 1.5865525393145705141e-1 },
        { -0.1, 4.6017216272297101633e-1 },
        { 0.7, 7.5803634777692697138e-1 },
        { 2.5, 9.9379033467422386483e-1 },
    };

    [Theory]
    [MemberData(nameof(Student))]
    public void Student_tail(double t, double df, double want)
    {
        Close(want, Probability.StudentUpper(t, df));
        Close(1 - want, Probability.StudentUpper(-t, df));
    }

    [Theory]
    [MemberData(nameof(Fisher))]
    public void Fisher_tail(double f, double df1, double df2, double want)
    {
        Close(want, Probability.FisherUpper(f, df1, df2));
        // the same probability as the lower tail of the reciprocal
        Close(want, Probability.FisherCdf(1 / f, df2, df1));
    }

    [Theory]
    [MemberData(nameof(ChiSquare))]
    public void Chi_square_tail(double x, double df, double want)
    {
        Close(want, Probability.ChiSquareUpper(x, df));
        Close(1 - want, Probability.ChiSquareCdf(x, df), 1e-12, 1e-15);
    }

    [Theory]
    [MemberData(nameof(Normal))]
    public void Normal_tail(double z, double want)
    {
        // a subnormal has fewer digits
        Close(want, Probability.NormalCdf(z), want < 1e-307 ? 1e-8 : 1e-12);
        Close(want, Probability.NormalUpper(-z), want < 1e-307 ? 1e-8 : 1e-12);
    }

    [Theory]
    [InlineData(1e-300)]
    [InlineData(1e-40)]
    [InlineData(1e-10)]
    [InlineData(0.001)]
    [InlineData(0.025)]
    [InlineData(0.3)]
    [InlineData(0.5)]
    [InlineData(0.9)]
    [InlineData(0.975)]
    [InlineData(0.9999)]
    public void Quantiles_invert_the_tails(double p)
    {
        Close(p, Probability.NormalCdf(Probability.NormalQuantile(p)));
        foreach (double df in (ReadOnlySpan<double>)[0.8, 1, 2, 3.37, 30, 1000, 1e6])
        {
            // below this the t quantile of few degrees of freedom leaves the range of doubles
            if (p > 1e-100)
                Close(p, Probability.StudentUpper(-Probability.StudentQuantile(p, df), df));
            if (p > 1e-20)
                Close(p, Probability.ChiSquareCdf(Probability.ChiSquareQuantile(p, df), df));
            foreach (double df1 in (ReadOnlySpan<double>)[1, 4, 200])
                if (p > 1e-20)
                    Close(p, Probability.FisherCdf(Probability.FisherQuantile(p, df1, df), df1, df));
        }
    }

    // relative, since the far tail is what a p-value is read for
    private static void Close(double want, double got, double relative = 1e-12, double absolute = 0) =>
        Assert.True(Math.Abs(got - want) <= Math.Max(absolute, relative * Math.Abs(want)), $"expected {want:R} but got {got:R}, relative error {(got - want) / want:E2}");
}
