using Gaugeyard.Statistics.Outliers;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class AdjustedPTests
{
    [Fact]
    public void Holm_by_hand()
    {
        double[] q = AdjustedP.Holm([0.01, 0.04, 0.03, double.NaN, 0.005]);
        Near(0.03, q[0], 1e-14, "0");
        Near(0.06, q[1], 1e-14, "1");
        Near(0.06, q[2], 1e-14, "2");
        Assert.True(double.IsNaN(q[3]));
        Near(0.02, q[4], 1e-14, "4");
    }

    // Benjamini and Hochberg (1995), section 4.1: fifteen p-values of a study of thrombolysis, of which their procedure names four at 0.05
    [Fact]
    public void False_discovery_names_four_of_the_published_fifteen()
    {
        double[] p = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.0000];
        double[] q = AdjustedP.FalseDiscovery(p);
        Assert.Equal(4, q.Count(x => x <= 0.05));
        Near(15 * 0.0095 / 4, q[3], 1e-14, "fourth");
        Assert.Equal(q.Order(), q);
        Assert.Equal(3, AdjustedP.Holm(p).Count(x => x <= 0.05));
    }

    [Fact]
    public void A_chance_beyond_one_is_a_mistake() => Assert.Throws<ArgumentException>(() => AdjustedP.Holm([0.5, 1.5]));
}
