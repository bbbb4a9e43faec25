using Gaugeyard.Statistics.Regression;
using Gaugeyard.Statistics.Tests.Reference;
using Xunit;
using static Gaugeyard.Statistics.Tests.Reference.ReferenceCases;

namespace Gaugeyard.Statistics.Tests.Regression;

public sealed class StepwiseReferenceTests
{
    public static TheoryData<string> Cases => [.. ReferenceCases.Of("05_stepwise").Select(c => c.Id)];

    [Theory]
    [MemberData(nameof(Cases))]
    public void Every_trace_agrees_with_the_reference(string id)
    {
        var c = ReferenceCases.Of("05_stepwise").First(x => x.Id == id).Case;
        var spec = c.GetProperty("spec");
        var data = Data(c.GetProperty("data").GetString()!);
        string reading = spec.GetProperty("response").GetString()!;
        string[] names = [.. spec.GetProperty("candidates").EnumerateArray().Select(e => e.GetString()!)];
        var factors = spec.GetProperty("factors").EnumerateArray().Select(e => e.GetString()!).ToHashSet();
        int[] rows = [.. Enumerable.Range(0, data[reading].Length).Where(i => data[reading][i] is not null && names.All(n => data[n][i] is not null))];
        var all = new DesignData(rows.Length);
        var terms = new List<TermSpec>();
        foreach (string name in names)
        {
            bool category = factors.Contains(name) || rows.Any(i => !double.TryParse(data[name][i], out _));
            terms.Add(new TermSpec(name, category ? TermKind.Category : TermKind.Number, name));
            if (category)
            {
                string[] levels = [.. rows.Select(i => data[name][i]!).Distinct()];
                all.Categories[name] = ([.. rows.Select(i => Array.IndexOf(levels, data[name][i]))], levels);
            }
            else
                all.Numbers[name] = [.. rows.Select(i => Number(data[name][i]))];
        }
        var columns = Design.Of(terms, all).Columns.Select(x => (x.Term, x.Values)).ToArray();
        double[] y = [.. rows.Select(i => Number(data[reading][i]))];
        IReadOnlyList<int>[] parents = [.. names.Select(_ => (IReadOnlyList<int>)[])];
        int compared = 0;
        foreach (var trace in c.GetProperty("values").EnumerateObject())
        {
            string[] parts = trace.Name.Split('_');
            if (trace.Value.ValueKind != System.Text.Json.JsonValueKind.Object || !trace.Value.TryGetProperty("trace", out var steps) || parts.Length < 2)
                continue;
            SelectionCriterion? criterion = parts[^1].ToLowerInvariant() switch { "aic" => SelectionCriterion.Aic, "bic" => SelectionCriterion.Bic, "aicc" => SelectionCriterion.Aicc, _ => null };
            SelectionDirection? direction = parts[0] switch { "forward" => SelectionDirection.Forward, "backward" => SelectionDirection.Backward, "both" => SelectionDirection.Both, _ => null };
            if (criterion is null || direction is null)
                continue;
            var path = Stepwise.Select(columns, names.Length, parents, y, new StepwiseOptions { Criterion = criterion.Value, Direction = direction.Value, StartWithAll = trace.Name.Contains("from_full", StringComparison.Ordinal) });
            var want = steps.EnumerateArray().Where(s => s.GetProperty("action").GetString() is not ("start" or "stop")).Select(s => (s.GetProperty("action").GetString() == "add", s.GetProperty("term").GetString()!)).ToArray();
            Assert.Equal(want, path.Steps.Where(s => s.Term is not null).Select(s => (s.Adds, names[s.Term!.Value])));
            double[] values = [.. steps.EnumerateArray().Where(s => s.GetProperty("action").GetString() != "stop").Select(s => Number(s.GetProperty("criterion")))];
            for (int k = 1; k < values.Length; k++)
                Near(values[k] - values[k - 1], path.Steps[k].Value - path.Steps[k - 1].Value, 1e-8, $"{trace.Name} step {k}", 1e-8);
            compared++;
        }
        Assert.True(compared > 0, "no trace was compared");
    }

    // Draper and Smith, Applied Regression Analysis: cement heat (Hald 1952).
    [Fact]
    public void Cement_data_depend_on_the_criterion()
    {
        double[] y = [78.5, 74.3, 104.3, 87.6, 95.9, 109.2, 102.7, 72.5, 93.1, 115.9, 83.8, 113.3, 109.4];
        (int, double[])[] x =
        [
            (0, [7, 1, 11, 11, 7, 11, 3, 1, 2, 21, 1, 11, 10]),
            (1, [26, 29, 56, 31, 52, 55, 71, 31, 54, 47, 40, 66, 68]),
            (2, [6, 15, 8, 8, 6, 9, 17, 22, 18, 4, 23, 9, 8]),
            (3, [60, 52, 20, 47, 33, 22, 6, 44, 22, 26, 34, 12, 12]),
        ];
        IReadOnlyList<int>[] none = [[], [], [], []];
        Assert.Equal([0, 1, 3], Stepwise.Select(x, 4, none, y, new StepwiseOptions { Criterion = SelectionCriterion.Aic, Direction = SelectionDirection.Backward }).Chosen);
        Assert.Equal([0, 1], Stepwise.Select(x, 4, none, y, new StepwiseOptions { Criterion = SelectionCriterion.Bic }).Chosen);
        // x4 enters, x1, x2, then x4 leaves: alpha 0.15 both ways
        var path = Stepwise.Select(x, 4, none, y, new StepwiseOptions { Criterion = SelectionCriterion.PartialF, EnterP = 0.15, LeaveP = 0.1500001 });
        Assert.Equal([(true, 3), (true, 0), (true, 1), (false, 3)], path.Steps.Where(s => s.Term is not null).Select(s => (s.Adds, s.Term!.Value)));
    }

    [Fact]
    public void Products_enter_after_their_parents_and_parents_leave_after_their_products()
    {
        var random = new Random(3);
        double[] a = [.. Enumerable.Range(0, 60).Select(_ => random.NextDouble() - 0.5)], b = [.. Enumerable.Range(0, 60).Select(_ => random.NextDouble() - 0.5)];
        double[] product = [.. a.Zip(b, (x, z) => x * z)], y = [.. product.Select(p => 10 * p + 0.01 * random.NextDouble())];
        var path = Stepwise.Select([(0, a), (1, b), (2, product)], 3, [[], [], [0, 1]], y, new StepwiseOptions { StartWithAll = true });
        Assert.Contains(2, path.Chosen);
        Assert.Contains(0, path.Chosen);
        Assert.Contains(1, path.Chosen);
    }
}
