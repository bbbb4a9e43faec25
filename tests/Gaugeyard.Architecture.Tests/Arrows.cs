namespace Gaugeyard.Architecture.Tests;

/// <summary>What a project under src may know: our projects, and packages. Everything else is an arrow that points the wrong way.</summary>
/// <param name="Projects">Our projects, without the leading "Gaugeyard.".</param>
/// <param name="Packages">Packages named in the project file.</param>
internal sealed record Arrows(string[] Projects, string[] Packages)
{
    public static IReadOnlyDictionary<string, Arrows> Allowed { get; } = new Dictionary<string, Arrows>
    {
        // System.Numerics.Tensors is the runtime's own vector arithmetic
        ["Statistics"] = new([], ["MathNet.Numerics", "System.Numerics.Tensors"]),
        ["Records"] = new([], []),
        ["Exchange"] = new(["Records"],
        [
            "ClosedXML", "ExcelDataReader", "Sep", "csFastFloat",
            // ClosedXML's companions, pinned
            "DocumentFormat.OpenXml", "ExcelNumberFormat", "System.Drawing.Common", "System.IO.Packaging",
        ]),
        ["Analysis"] = new(["Records", "Statistics"], []),
        ["Storage"] = new(["Records", "Analysis"], ["Microsoft.EntityFrameworkCore.Sqlite", "Microsoft.EntityFrameworkCore.Design", "ZstdSharp.Port"]),
        ["Portal"] = new(["Records", "Statistics", "Exchange", "Analysis", "Storage"], ["MudBlazor", "Microsoft.AspNetCore.OpenApi"]),
    };
}
