using Gaugeyard.Analysis.Curves;

namespace Gaugeyard.Portal.Api;

/// <summary>The question about a curve.</summary>
internal static class CurvesRoutes
{
    public static void MapCurves(this RouteGroupBuilder runSets) => runSets.MapQuestion<CurveQuestion, CurveAnswer>("curve");
}
