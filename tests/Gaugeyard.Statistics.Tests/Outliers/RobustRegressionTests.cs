using Gaugeyard.Statistics.Outliers;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Outliers;

public sealed class RobustRegressionTests
{
    [Theory]
    [InlineData("rlm_hbk", "Y", "X1", "X2", "X3")]
    [InlineData("rlm_mtcars", "mpg", "wt", "hp")]
    public void Agrees_with_an_independent_library(string id, string reading, params string[] predictors)
    {
        var (_, c) = Of("09_robust").Single(x => x.Id == id);
        var data = Data(c.GetProperty("data").GetString()!);
        double[] y = Array.ConvertAll(data[reading], Number), ones = new double[y.Length];
        Array.Fill(ones, 1);
        double[][] design = [ones, .. predictors.Select(p => Array.ConvertAll(data[p], Number))];
        foreach (var (loss, field) in new[] { (RobustLoss.Bisquare, "bisquare"), (RobustLoss.Huber, "huber") })
        {
            var fit = RobustRegression.Fit(design, y, loss);
            var want = c.GetProperty("values").GetProperty(field);
            Assert.True(fit.Converged);
            double[] coefficients = Numbers(want.GetProperty("coef")), weights = Numbers(want.GetProperty("weights"));
            for (int j = 0; j < coefficients.Length; j++)
                Near(coefficients[j], fit.Coefficients[j], 1e-8, $"{id} {field} {j}");
            Near(Number(want.GetProperty("scale")), fit.Scale, 1e-8, $"{id} {field} scale");
            for (int i = 0; i < weights.Length; i++)
                Near(weights[i], fit.Weights[i], 1e-7, $"{id} {field} weight {i}", 1e-9);
        }
    }

    [Fact]
    public void A_line_through_most_points_is_found_exactly()
    {
        double[] x = [.. Enumerable.Range(0, 21).Select(i => (double)i)], ones = Array.ConvertAll(x, _ => 1.0), y = Array.ConvertAll(x, v => 2 + 3 * v);
        y[4] = 500;
        var fit = RobustRegression.Fit([ones, x], y);
        Near(2, fit.Coefficients[0], 1e-9, "intercept", 1e-9);
        Near(3, fit.Coefficients[1], 1e-9, "slope");
        Assert.True(fit.Weights[4] < 1e-6);
    }

    [Fact]
    public void Mistakes_are_told()
    {
        Assert.Contains("length 3", Assert.Throws<ArgumentException>(() => RobustRegression.Fit([[1, 1]], [1, 2, 3])).Message, StringComparison.Ordinal);
        Assert.Throws<ArgumentException>(() => RobustRegression.Fit([[1, 1, 1, 1], [2, 2, 2, 2]], [1, 2, 3, 5]));
    }
}
