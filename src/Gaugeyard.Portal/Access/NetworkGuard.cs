using System.Net;

namespace Gaugeyard.Portal.Access;

/// <summary>Keeps the portal on this computer unless its owner says otherwise, since there are no accounts yet.</summary>
internal static class NetworkGuard
{
    /// <summary>Stops the start when the portal would listen to other computers without leave; logs a warning when it has leave.</summary>
    public static void Apply(WebApplication app, PortalSettings settings)
    {
        string[] configured = (app.Configuration["urls"] ?? app.Configuration["ASPNETCORE_URLS"] ?? "").Split(';', StringSplitOptions.RemoveEmptyEntries | StringSplitOptions.TrimEntries);
        IEnumerable<string?> endpoints = app.Configuration.GetSection("Kestrel:Endpoints").GetChildren().Select(e => e["Url"]);
        string[] addresses = [.. configured, .. app.Urls, .. endpoints.OfType<string>()];
        if (FirstOpenAddress(addresses) is not { } open)
            return;
        if (!settings.AllowOpenNetwork)
            throw new InvalidOperationException($"Gaugeyard does not listen on {open}: anybody on the network could read and change the run sets, since there are no accounts yet. Use http://127.0.0.1:5080, or set Gaugeyard:AllowOpenNetwork to true if the network is trusted.");
        app.Logger.LogWarning("Gaugeyard listens on {Address}: anybody who can reach it can read and change the run sets", open);
    }

    /// <summary>The first address that is not loopback, or null.</summary>
    public static string? FirstOpenAddress(IEnumerable<string> addresses) => addresses.FirstOrDefault(a => !IsLoopback(a));

    /// <summary>Whether a listening address such as http://127.0.0.1:5000 can only be reached from this computer.</summary>
    public static bool IsLoopback(string address)
    {
        try
        {
            var parsed = BindingAddress.Parse(address);
            if (parsed.IsUnixPipe)
                return true;
            string host = parsed.Host.Trim('[', ']');
            return host.Equals("localhost", StringComparison.OrdinalIgnoreCase) || (IPAddress.TryParse(host, out var ip) && IPAddress.IsLoopback(ip));
        }
        catch (FormatException)
        {
            return false;
        }
    }
}
