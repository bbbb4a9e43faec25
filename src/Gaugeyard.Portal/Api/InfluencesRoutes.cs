using Gaugeyard.Analysis.Influences;

namespace Gaugeyard.Portal.Api;

/// <summary>Questions about what drives a reading.</summary>
internal static class InfluencesRoutes
{
    public static void MapInfluences(this RouteGroupBuilder runSets)
    {
        runSets.MapQuestion<RegressionQuestion, RegressionAnswer>("regression");
        runSets.MapQuestion<StepwiseQuestion, StepwiseAnswer>("stepwise");
    }
}
