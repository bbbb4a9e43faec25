namespace Gaugeyard.Portal;

/// <summary>What an administrator can set under "Gaugeyard" in appsettings.json or by Gaugeyard__ environment variables.</summary>
public sealed record PortalSettings
{
    /// <summary>Folder of the database and the uploaded files, relative to the content root.</summary>
    public string Data { get; init; } = "data";

    /// <summary>Whether the demo season is loaded when the store is empty at first start.</summary>
    public bool Demo { get; init; } = true;

    /// <summary>Allows listening on an address other computers can reach, although there are no accounts.</summary>
    public bool AllowOpenNetwork { get; init; }

    public PortalLimits Limits { get; init; } = new();
}

/// <summary>Bounds on what may come in.</summary>
public sealed record PortalLimits
{
    /// <summary>Largest upload, in bytes.</summary>
    public long FileBytes { get; init; } = 2L * 1024 * 1024 * 1024;

    /// <summary>Most columns of a file.</summary>
    public int Columns { get; init; } = 2000;

    /// <summary>Most cells of a file (records times columns).</summary>
    public long Cells { get; init; } = 400_000_000;

    /// <summary>Most bytes a compressed file may unpack to.</summary>
    public long UnpackedBytes { get; init; } = 4L * 1024 * 1024 * 1024;
}
