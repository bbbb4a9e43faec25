using Gaugeyard.Analysis.Wording;

namespace Gaugeyard.Analysis.Curves;

/// <summary>The finding about a curve as a sentence.</summary>
internal static class CurveHeadline
{
    public static string Of(CurveQuestion question, string? unit, string? xUnit, CurveData data, CurveResult result)
    {
        if (question.Against.Count > 1)
            return $"{Say.Sentence(question.Reading)} follows {Say.List(question.Against)} with a typical error of {Say.With(result.Smoothing.S ?? double.NaN, Say.DecimalsFor(result.Smoothing.S ?? 1), unit)} about the surface.";
        var known = result.Points.Where(p => p.Fitted is not null).OrderBy(p => p.At[0]).ToList();
        if (known.Count < 2)
            return $"No point asked for lies in the tested range of {question.Against[0]}, {Say.Range(data.X[0].Min(), data.X[0].Max(), Say.DecimalsFor(data.X[0].Max() - data.X[0].Min()))}{Say.Unit(xUnit)}.";
        var first = known[0];
        var last = known[^1];
        var highest = known.MaxBy(p => p.Fitted)!;
        var lowest = known.MinBy(p => p.Fitted)!;
        double change = last.Fitted!.Value - first.Fitted!.Value, sweep = highest.Fitted!.Value - lowest.Fitted!.Value;
        int decimals = Say.DecimalsFor(known.Select(p => p.Se ?? double.NaN).Where(double.IsFinite).DefaultIfEmpty(sweep / 10).Average());
        int xDecimals = Math.Max(0, Say.DecimalsFor((last.At[0] - first.At[0]) / 10) - 1);
        string From(CurvePoint a, CurvePoint b) => $"from {Say.Number(a.At[0], xDecimals)} to {Say.With(b.At[0], xDecimals, xUnit)}";
        string line = result.StraightLine is { Score: { } s, CurveScore: { } c } ? c < 0.97 * s ? "; a straight line misses this" : "; a straight line does as well" : "";
        double noise = known.Select(p => p.Se ?? 0).Average();
        if (sweep < 2 * noise)
            return $"{Say.Sentence(question.Reading)} does not change visibly with {question.Against[0]} {From(first, last)}.";
        string reading = Say.Sentence(question.Reading);
        string Interval(CurvePoint a, CurvePoint b)
        {
            // both ends vary, so their errors add in squares
            if (a.Se is not { } sa || b.Se is not { } sb)
                return "";
            double z = Statistics.Numerics.Probability.NormalQuantile(0.5 + question.Confidence / 2), d = Math.Abs(b.Fitted!.Value - a.Fitted!.Value), half = z * Math.Sqrt(sa * sa + sb * sb);
            return $" (about {Say.Range(d - half, d + half, decimals)})";
        }
        if (Math.Abs(change) > 0.8 * sweep)
            return $"{reading} {(change > 0 ? "rises" : "falls")} {Say.With(Math.Abs(change), decimals, unit)} {From(first, last)}{Interval(first, last)}{line}.";
        // it turns: say the larger leg
        var turn = Math.Abs(lowest.Fitted.Value - first.Fitted.Value) + Math.Abs(lowest.Fitted.Value - last.Fitted.Value) > Math.Abs(highest.Fitted.Value - first.Fitted.Value) + Math.Abs(highest.Fitted.Value - last.Fitted.Value) ? lowest : highest;
        return $"{reading} {(turn == lowest ? "is lowest" : "is highest")} near {Say.With(turn.At[0], xDecimals, xUnit)} ({Say.With(turn.Fitted!.Value, decimals, unit)}) and {(turn == lowest ? "rises" : "falls")} to {Say.Number(first.Fitted.Value, decimals)} at {Say.Number(first.At[0], xDecimals)} and {Say.Number(last.Fitted.Value, decimals)} at {Say.With(last.At[0], xDecimals, xUnit)}{line}.";
    }
}
