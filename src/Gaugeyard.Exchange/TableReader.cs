using Gaugeyard.Exchange.Detection;

namespace Gaugeyard.Exchange;

/// <summary>
/// Takes in a table from delimited text (also compressed as .gz or as the only file of a .zip) or an .xlsx workbook. What a
/// file is follows from its content, never from its name alone. The same file and choices give the same result.
/// </summary>
public static class TableReader
{
    /// <summary>Looks at the beginning of a file and says how it will be read.</summary>
    /// <param name="path">Where the bytes are.</param>
    /// <param name="fileName">What the user calls the file; used in sentences only, never as a path.</param>
    /// <param name="choices">What the user overrules; null for nothing.</param>
    /// <param name="limits">Bounds; null for the defaults.</param>
    /// <param name="cancel">Stops the reading.</param>
    /// <exception cref="UnreadableFileException">The file cannot be taken in; the message says what, where and what to do.</exception>
    /// <exception cref="OperationCanceledException">Reading was stopped.</exception>
    public static ReadPreview Inspect(string path, string fileName, ReadChoices? choices = null, ReadLimits? limits = null, CancellationToken cancel = default)
    {
        limits ??= new ReadLimits();
        return TableScan.Run(path, fileName, choices ?? ReadChoices.Detected, limits, limits.PreviewRecords, null, cancel).Reading;
    }

    /// <summary>Reads a file whole.</summary>
    /// <param name="path">Where the bytes are.</param>
    /// <param name="fileName">What the user calls the file; used in sentences only, never as a path.</param>
    /// <param name="choices">What the user overrules; null for nothing.</param>
    /// <param name="limits">Bounds; null for the defaults.</param>
    /// <param name="progress">Receives the share done, 0 to 1.</param>
    /// <param name="cancel">Stops the reading.</param>
    /// <exception cref="UnreadableFileException">The file cannot be taken in; the message says what, where and what to do.</exception>
    /// <exception cref="OperationCanceledException">Reading was stopped.</exception>
    public static ImportedTable Read(string path, string fileName, ReadChoices? choices = null, ReadLimits? limits = null, IProgress<double>? progress = null, CancellationToken cancel = default) =>
        TableScan.Run(path, fileName, choices ?? ReadChoices.Detected, limits ?? new ReadLimits(), null, progress, cancel);
}
