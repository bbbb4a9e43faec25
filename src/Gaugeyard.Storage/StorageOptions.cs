namespace Gaugeyard.Storage;

/// <summary>Where the store lives and how much it may keep in memory.</summary>
/// <param name="Folder">Folder of the database and the uploaded files; made when missing.</param>
public sealed record StorageOptions(string Folder)
{
    /// <summary>Bytes of decoded columns kept in memory; a column of a million numbers takes 8 MB.</summary>
    public long ColumnCacheBytes { get; init; } = 512L * 1024 * 1024;

    /// <summary>How long a deleted run set stays in the bin.</summary>
    public TimeSpan BinTime { get; init; } = TimeSpan.FromDays(30);

    internal string DatabaseFile => Path.Combine(Folder, "gaugeyard.db");

    internal string SourceFolder => Path.Combine(Folder, "sources");
}
