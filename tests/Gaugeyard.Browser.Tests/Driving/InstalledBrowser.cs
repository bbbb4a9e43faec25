namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>Finds a browser of the Chromium family on this machine; none is ever downloaded.</summary>
internal static class InstalledBrowser
{
    private static readonly string[] Names = ["chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "chrome", "microsoft-edge", "microsoft-edge-stable", "msedge"];

    private static readonly string[] Places =
    [
        "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome",
        "/Applications/Chromium.app/Contents/MacOS/Chromium",
        "/Applications/Microsoft Edge.app/Contents/MacOS/Microsoft Edge",
        @"%ProgramFiles%\Google\Chrome\Application\chrome.exe",
        @"%ProgramFiles(x86)%\Google\Chrome\Application\chrome.exe",
        @"%LocalAppData%\Google\Chrome\Application\chrome.exe",
        @"%ProgramFiles(x86)%\Microsoft\Edge\Application\msedge.exe",
        @"%ProgramFiles%\Microsoft\Edge\Application\msedge.exe",
    ];

    /// <summary>Path of the browser.</summary>
    /// <exception cref="InvalidOperationException">None is installed; the message says what to install.</exception>
    public static string Path => Candidates().FirstOrDefault(File.Exists)
        ?? throw new InvalidOperationException("No Chrome, Edge or Chromium was found. Install one of them (on Debian: apt-get install chromium), or set GAUGEYARD_BROWSER to its path, and run the browser tests again.");

    private static IEnumerable<string> Candidates()
    {
        if (Environment.GetEnvironmentVariable("GAUGEYARD_BROWSER") is { Length: > 0 } chosen)
            yield return chosen;
        string[] folders = (Environment.GetEnvironmentVariable("PATH") ?? "").Split(System.IO.Path.PathSeparator, StringSplitOptions.RemoveEmptyEntries);
        foreach (string name in Names)
            foreach (string folder in folders)
            {
                yield return System.IO.Path.Combine(folder, name);
                if (OperatingSystem.IsWindows())
                    yield return System.IO.Path.Combine(folder, name + ".exe");
            }
        foreach (string place in Places)
            yield return Environment.ExpandEnvironmentVariables(place);
    }
}
