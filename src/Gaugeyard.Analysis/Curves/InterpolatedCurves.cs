using Gaugeyard.Analysis.Wording;
using Gaugeyard.Statistics.Smoothing;

namespace Gaugeyard.Analysis.Curves;

/// <summary>Answers a curve question by a curve through every point.</summary>
internal static class InterpolatedCurves
{
    public static CurveResult Of(CurveQuestion question, CurveData data, double[][] points)
    {
        if (question.Band is { Kind: not BandKind.None })
            throw new QuestionException("A curve through every point has no band. Take local regression or a smoothing spline.");
        var (kind, words) = question.Way switch
        {
            CurveWay.NaturalCubic => (InterpolantKind.NaturalCubic, "Natural cubic spline through the points."),
            CurveWay.MonotoneCubic => (InterpolantKind.MonotoneCubic, "Shape-preserving cubic through the points (Fritsch and Carlson 1980)."),
            _ => (InterpolantKind.Akima, "Akima's cubic through the points (1970)."),
        };
        var (curve, reason) = Interpolants.Of(data.X[0], data.Y, kind);
        if (curve is null)
            throw new CannotAnswerException(Say.Sentence(reason!) + ".");
        int ties = data.Y.Length - data.X[0].Distinct().Count();
        var notes = new List<string> { "A curve through every point follows the noise too." };
        if (ties > 0)
            notes.Insert(0, $"{Say.Count(ties, "record")} {(ties == 1 ? "shares its" : "share their")} place with another; readings at the same place were averaged.");
        return new CurveResult
        {
            Points = [.. points.Select(p => new CurvePoint(p, data.Inside(p) ? curve.Evaluate(p[0]) : null, null, null, null, null, null))],
            Smoothing = new SmoothingFigures { Trace = data.Y.Length - ties, Scores = [] },
            StraightLine = UnseenParts.AgainstLine(data, question.Seed, null, CancellationToken.None),
            Fitted = [.. data.X[0].Select(curve.Evaluate)],
            Notes = notes,
            Method = [words],
        };
    }
}
