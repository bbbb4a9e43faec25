namespace Gaugeyard.Exchange;

/// <summary>Bounds on what a file may ask of the portal. Each default is far above honest use and well below what hurts the others.</summary>
public sealed record ReadLimits
{
    /// <summary>Columns of one table; more is nearly always a wrong separator or a table lying on its side.</summary>
    public int Columns { get; init; } = 2_000;

    /// <summary>Characters of one cell (a spreadsheet cell holds at most 32,767).</summary>
    public int CellCharacters { get; init; } = 1_000_000;

    /// <summary>Characters of one text record, all cells together; below the 2^24 of the text reader.</summary>
    public int RecordCharacters { get; init; } = 12_000_000;

    /// <summary>Records of one table.</summary>
    public int Records { get; init; } = 20_000_000;

    /// <summary>Cells of one table; each takes about 8 bytes while it is read.</summary>
    public long Cells { get; init; } = 500_000_000;

    /// <summary>Bytes that a compressed text file may inflate to.</summary>
    public long UnpackedBytes { get; init; } = 4L << 30;

    /// <summary>Bytes that the parts of a workbook may inflate to, together.</summary>
    public long InflatedWorkbookBytes { get; init; } = 1L << 30;

    /// <summary>Bytes that a workbook's table of texts may inflate to; it is held in memory.</summary>
    public long SharedTextBytes { get; init; } = 256L << 20;

    /// <summary>Records that a preview looks at; a longer file's counts are estimates until it is read whole.</summary>
    public int PreviewRecords { get; init; } = 50_000;
}
