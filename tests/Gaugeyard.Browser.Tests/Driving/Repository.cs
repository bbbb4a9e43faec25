namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>Places in the source tree.</summary>
internal static class Repository
{
    public static string Root { get; } = FindRoot();

    public static string DemoData(string name) => Path.Combine(Root, "demo-data", name);

    /// <summary>A file for people to look at after the tests; git ignores the folder.</summary>
    public static string Picture(string name)
    {
        string folder = Path.Combine(Root, "artifacts", "pictures");
        Directory.CreateDirectory(folder);
        return Path.Combine(folder, name + ".png");
    }

    private static string FindRoot()
    {
        string? folder = AppContext.BaseDirectory;
        while (folder is not null && !File.Exists(Path.Combine(folder, "Gaugeyard.slnx")))
            folder = Path.GetDirectoryName(folder);
        return folder ?? throw new InvalidOperationException("The tests run outside the repository: no Gaugeyard.slnx above " + AppContext.BaseDirectory);
    }
}
