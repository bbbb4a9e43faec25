using System.Xml.Linq;

namespace Gaugeyard.Architecture.Tests;

/// <summary>The source tree that the tests stand in.</summary>
internal static class Repository
{
    public static string Root { get; } = FindRoot();

    /// <summary>Project files under src and tests.</summary>
    public static IReadOnlyList<string> Projects { get; } =
        [.. new[] { "src", "tests" }.SelectMany(f => Directory.EnumerateFiles(Path.Combine(Root, f), "*.csproj", SearchOption.AllDirectories)).Where(p => !IsBuilt(p)).Order(StringComparer.Ordinal)];

    /// <summary>The project's file name without its ending.</summary>
    public static string NameOf(string project) => Path.GetFileNameWithoutExtension(project);

    public static XDocument Read(string project) => XDocument.Load(project);

    public static IEnumerable<string> Includes(XDocument project, string element) =>
        project.Descendants(element).Select(e => (string?)e.Attribute("Include")).OfType<string>();

    /// <summary>Whether a path lies in a build output.</summary>
    public static bool IsBuilt(string path) => path.Replace('\\', '/').Split('/').Any(part => part is "bin" or "obj");

    private static string FindRoot()
    {
        string? folder = AppContext.BaseDirectory;
        while (folder is not null && !File.Exists(Path.Combine(folder, "Gaugeyard.slnx")))
            folder = Path.GetDirectoryName(folder);
        return folder ?? throw new InvalidOperationException("The tests run outside the repository: no Gaugeyard.slnx above " + AppContext.BaseDirectory);
    }
}
