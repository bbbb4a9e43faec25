using Gaugeyard.Statistics.Describing;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Describing;

public sealed class VehicleMeanTests
{
    // Own computation of CR2 with Satterthwaite degrees of freedom by direct n x n matrices (NumPy 1.24).
    [Fact]
    public void Unequal_vehicles_match_the_matrix_formula()
    {
        double[] values = [7.02, 7.05, 6.98, 7.01, 7.41, 7.38, 7.44, 7.20, 7.24];
        int[] vehicles = [0, 0, 0, 0, 1, 1, 1, 2, 2];
        var mean = VehicleMean.OfRuns(values, vehicles, 0.95);
        Assert.Equal(7.192222222, mean.Mean, 5e-10);
        Assert.Equal(.1382776391, mean.StandardError, 5e-11);
        Assert.Equal(1.842105263, mean.Df, 5e-10);
    }

    [Fact]
    public void One_run_per_vehicle_is_the_t_interval()
    {
        double[] values = [7.1, 7.6, 6.9, 7.4, 8.0, 7.0];
        var by = VehicleMean.OfRuns(values, [0, 1, 2, 3, 4, 5], 0.95);
        var plain = Summary.Of(values, 0.95).Mean;
        Assert.Equal(plain.StandardError, by.StandardError, 1e-14);
        Assert.Equal(5, by.Df, 1e-12);
        Assert.Equal(plain.Low, by.Low, 1e-12);
    }

    // JCGM 100:2008 (GUM) H.5: ten days of five readings; the right standard uncertainty is that of the ten day means, 57.09/sqrt(10).
    [Fact]
    public void Repeats_do_not_count_as_independent()
    {
        double[] day = [172, 116, 13, 144, 106, 31, 60, 125, 163, 41];
        double[] values = [.. day.SelectMany(d => new[] { d - 20, d - 10, d, d + 10, d + 20 })];
        int[] vehicles = [.. Enumerable.Range(0, 50).Select(i => i / 5)];
        var mean = VehicleMean.OfRuns(values, vehicles, 0.95);
        Assert.Equal(97.1, mean.Mean, 1e-12);
        Assert.Equal(18.05, mean.StandardError, 0.005);
        Assert.Equal(9, mean.Df, 1e-9);
    }

    [Fact]
    public void One_vehicle_has_no_interval() =>
        Assert.True(double.IsNaN(VehicleMean.OfRuns([7, 7.5, 8], [0, 0, 0], 0.95).StandardError));

    // EPA420-R-09-014 (2009) appendix A: 704 mi at 16 mi/gal and 216 mi at 24 mi/gal take 53 gal: 17.4 mi/gal.
    [Fact]
    public void Fuel_over_distance_averages_economy_rightly()
    {
        var gallonsPerMile = VehicleMean.OfTotals([44, 9], [704, 216], [0, 1], 0.95);
        Assert.Equal(17.358491, 1 / gallonsPerMile.Mean, 5e-7);
    }

    // {7.0 7.4 6.9 7.5}, {7.3 7.1 7.6}, {7.2 6.8}: pooled .0777778, restricted maximum likelihood .0750000 (own computation).
    [Fact]
    public void Pooled_and_likelihood_variances_within_vehicles_are_different_numbers()
    {
        var split = VarianceComponents.Of([7.0, 7.4, 6.9, 7.5, 7.3, 7.1, 7.6, 7.2, 6.8], [0, 0, 0, 0, 1, 1, 1, 2, 2])!;
        Assert.Equal(.0777778, split.PooledWithin, 5e-7);
        Assert.Equal(.0750000, split.Within, 5e-7);
    }
}
