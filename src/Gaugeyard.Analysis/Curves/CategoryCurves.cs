using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Analysis.Wording;
using Gaugeyard.Analysis.Work;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Curves of their own for the levels of a category; the most frequent ones where there are many.</summary>
internal static class CategoryCurves
{
    private const int Most = 8;

    public static IReadOnlyList<CategoryCurve> Of(CurveQuestion question, string by, Sample sample, WorkContext work)
    {
        var (codes, labels) = sample.Category(by);
        var counts = new int[labels.Length];
        foreach (int c in codes)
            if (c >= 0)
                counts[c]++;
        var shown = Enumerable.Range(0, labels.Length).OrderByDescending(k => counts[k]).Take(Most).Order();
        var curves = new List<CategoryCurve>();
        foreach (int k in shown)
        {
            work.Cancel.ThrowIfCancellationRequested();
            var part = sample.Keep([.. codes.Select(c => c == k)], $"not {labels[k]}");
            CategoryCurve None(string reason) => new(labels[k], part.Count, part.VehicleCount, reason, [], null, null);
            if (part.Count < 3)
            {
                curves.Add(None($"Only {Say.Count(part.Count, "record")}; a curve needs at least 3."));
                continue;
            }
            var data = CurveData.Of(part, question);
            int distinct = data.X[0].Distinct().Count();
            if (distinct < 10)
            {
                curves.Add(None($"Only {Say.Count(distinct, "distinct value")} of {question.Against[0]}: too few to tell a shape."));
                continue;
            }
            try
            {
                var result = question.Fit(data, question.Points(data.X), work);
                curves.Add(new CategoryCurve(labels[k], part.Count, part.VehicleCount, null, result.Points, result.Smoothing, CurveHeadline.Change(result)));
            }
            catch (Exception e) when (e is CannotAnswerException or QuestionException)
            {
                curves.Add(None(e.Message));
            }
        }
        return curves;
    }
}
