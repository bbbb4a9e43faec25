using Gaugeyard.Analysis.Groups;

namespace Gaugeyard.Portal.Api;

/// <summary>Questions about groups.</summary>
internal static class GroupsRoutes
{
    public static void MapGroups(this RouteGroupBuilder runSets)
    {
        runSets.MapQuestion<GroupsQuestion, GroupsAnswer>("groups");
        runSets.MapQuestion<ComparisonQuestion, ComparisonAnswer>("comparison");
        runSets.MapQuestion<SimilarityQuestion, SimilarityAnswer>("similarity");
    }
}
