namespace Gaugeyard.Exchange;

/// <summary>Reads a file into typed columns.</summary>
public static class TableReader
{
    /// <summary>Reads the whole file.</summary>
    /// <exception cref="UnreadableFileException">The file cannot be read; the message says what, where, and what to do.</exception>
    public static ImportedTable Read(string path, string fileName, ReadChoices choices, ReadLimits limits, IProgress<double>? progress = null, CancellationToken cancel = default) =>
        throw new UnreadableFileException($"'{fileName}' cannot be read yet: no reader is built in.");
}
