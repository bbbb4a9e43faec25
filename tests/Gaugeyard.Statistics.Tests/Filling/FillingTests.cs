using Gaugeyard.Statistics.Filling;
using Gaugeyard.Statistics.Numerics;
using Gaugeyard.Statistics.Regression;
using Xunit;

namespace Gaugeyard.Statistics.Tests.Filling;

public sealed class FillingTests
{
    // Own computation (Python): 24 vehicles, n_v = 1 + (7v mod 4) runs, R_j = ((37j) mod 101)/100, mu = 5 + .01v, s = 1: (4.09, 6.15).
    [Fact]
    public void Weighted_order_statistics_match_the_worked_case()
    {
        var residuals = new List<(double Mu, double R, double W)>();
        int j = 0;
        for (int v = 0; v < 24; v++)
        {
            int n = 1 + 7 * v % 4;
            for (int k = 0; k < n; k++, j++)
                residuals.Add((5 + 0.01 * v, 37 * j % 101 / 100.0, 1.0 / (25 * n)));
        }
        Assert.Equal(60, residuals.Count);
        double high = CrossConformal.Weighted([.. residuals.Select(r => r.Mu + r.R)], [.. residuals.Select(r => r.W)], 0.05);
        double low = -CrossConformal.Weighted([.. residuals.Select(r => -(r.Mu - r.R))], [.. residuals.Select(r => r.W)], 0.05);
        Assert.Equal(4.09, low, 1e-9);
        Assert.Equal(6.15, high, 1e-9);
    }

    [Fact]
    public void With_one_run_each_it_is_the_order_statistic() =>
        Assert.Equal(20.0, CrossConformal.Weighted([.. Enumerable.Range(1, 20).Select(i => (double)i)], [.. Enumerable.Repeat(1.0 / 21, 20)], 0.05));

    [Fact]
    public void Below_nineteen_vehicles_no_distribution_free_interval_is_claimed()
    {
        Assert.True(double.IsPositiveInfinity(CrossConformal.Weighted([.. Enumerable.Range(1, 18).Select(i => (double)i)], [.. Enumerable.Repeat(1.0 / 19, 18)], 0.05)));
        var data = Season(12, 2, 3);
        var x = CrossConformal.Of(new RegressionWay(), data, Known(data), 0, 0.95, 1);
        Assert.Equal(IntervalClaim.AssumesNormal, x.At(0).Claim);
        Assert.True(x.At(0).Low < x.At(0).Value && x.At(0).Value < x.At(0).High);
    }

    // Coverage against its nominal level, by vehicles: 40 seeded seasons of 30 vehicles with repeat runs.
    [Fact]
    public void Intervals_of_new_vehicles_cover_as_they_say()
    {
        var rates = new List<double>();
        for (int s = 0; s < 40; s++)
        {
            var data = Season(40, 3, 100 + s);
            // the last ten vehicles are new
            int[] known = [.. Known(data).Where(i => data.Vehicles[i] < 30)], fresh = [.. Known(data).Where(i => data.Vehicles[i] >= 30)];
            var x = CrossConformal.Of(new RegressionWay(), data, known, 0, 0.95, 1);
            rates.AddRange(fresh.GroupBy(i => data.Vehicles[i]).Select(g => g.Average(i => x.At(i).Low <= data.Y[i] && data.Y[i] <= x.At(i).High ? 1.0 : 0)));
        }
        double mean = rates.Average(), se = Math.Sqrt(rates.Sum(r => (r - mean) * (r - mean)) / (rates.Count - 1) / rates.Count);
        // proved at least 0.90, usually about 0.95; four standard errors either side
        Assert.InRange(mean, 0.93 - 4 * se, 0.97 + 4 * se);
    }

    [Fact]
    public void Hidden_readings_of_the_trial_are_covered_and_beat_the_group_mean()
    {
        var data = Season(40, 4, 7);
        var floor = HiddenTrial.Of(new GroupMeanWay(), data, Known(data), 10, 0.95, 1).Where(h => !h.Refused).ToArray();
        foreach (IFillWay way in new IFillWay[] { new RegressionWay(), new StepwiseWay(), new LocalRegressionWay(), new SmoothingSplineWay(), new NearDonorsWay(), new VehicleCarryWay() })
        {
            var hidden = HiddenTrial.Of(way, data, Known(data), 10, 0.95, 1).Where(h => !h.Refused).ToArray();
            Assert.InRange(hidden.Count(h => h.Inside) / (double)hidden.Length, 0.85, 1);
            Assert.True(Rmse(hidden) < 0.9 * Rmse(floor), $"{way.Name} {Rmse(hidden)} against {Rmse(floor)}");
        }
        static double Rmse(HiddenReading[] h) => Math.Sqrt(h.Average(x => (x.Truth - x.Estimate) * (x.Truth - x.Estimate)));
    }

    [Fact]
    public void Nothing_is_filled_outside_what_was_tested()
    {
        var data = Season(20, 2, 5);
        int[] rows = Known(data);
        var range = TestedRange.Of(data, [.. rows.Where(i => data.Predictors.Numbers["mass"][i] < 2000 && data.Predictors.Categories["class"].Codes[i] != 2)]);
        int heavy = rows.First(i => data.Predictors.Numbers["mass"][i] > 2100), other = rows.First(i => data.Predictors.Categories["class"].Codes[i] == 2 && data.Predictors.Numbers["mass"][i] < 1900);
        Assert.Contains("above every tested value", range.Refusal(heavy));
        Assert.Contains("never tested", range.Refusal(other));
    }

    private static FillData Season(int vehicles, int runs, int seed)
    {
        var random = new RandomStream((ulong)seed, 1, 0);
        int n = vehicles * runs;
        var predictors = new DesignData(n);
        double[] mass = new double[n], temperature = new double[n], y = new double[n];
        int[] kind = new int[n], of = new int[n];
        for (int v = 0; v < vehicles; v++)
        {
            double m = 1000 + 1300 * random.NextDouble(), own = 0.3 * random.NextNormal();
            int k = random.NextInt(3);
            for (int r = 0; r < runs; r++)
            {
                int i = v * runs + r;
                (of[i], mass[i], kind[i], temperature[i]) = (v, m, k, 30 * random.NextDouble() - 5);
                y[i] = 2 + 0.004 * m + new[] { 0, 0.8, -1.2 }[k] + 0.001 * Math.Pow(temperature[i] - 20, 2) + own + 0.15 * random.NextNormal();
            }
        }
        predictors.Numbers["mass"] = mass;
        predictors.Numbers["temperature"] = temperature;
        predictors.Categories["class"] = (kind, ["car", "van", "hybrid"]);
        return new FillData(predictors, [new TermSpec("mass", TermKind.Number, "mass"), new TermSpec("temperature", TermKind.Number, "temperature"), new TermSpec("class", TermKind.Category, "class")], y, of);
    }

    private static int[] Known(FillData data) => [.. Enumerable.Range(0, data.Y.Length)];
}
