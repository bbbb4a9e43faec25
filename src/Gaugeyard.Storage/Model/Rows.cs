namespace Gaugeyard.Storage.Model;

/// <summary>A run set; its content lives in its revisions.</summary>
internal sealed class RunSetRow
{
    public required string Id { get; set; }

    public required string Name { get; set; }

    public string Note { get; set; } = "";

    public int Latest { get; set; }

    /// <summary>The highest record number ever given out, so that none is reused.</summary>
    public int HighestRecord { get; set; }

    public bool Demo { get; set; }

    public DateTime CreatedAt { get; set; }

    /// <summary>When it was put into the bin; null while in use.</summary>
    public DateTime? DeletedAt { get; set; }
}

/// <summary>One immutable revision together with its ledger entry.</summary>
internal sealed class RevisionRow
{
    public long Id { get; set; }

    public required string RunSetId { get; set; }

    public int Number { get; set; }

    public DateTime At { get; set; }

    public required string By { get; set; }

    public required string Kind { get; set; }

    public string Note { get; set; } = "";

    /// <summary>Settings as JSON.</summary>
    public string? Settings { get; set; }

    /// <summary>Hash of the content alone.</summary>
    public required string Content { get; set; }

    /// <summary>Hash over the content and the previous entry's fingerprint.</summary>
    public required string Fingerprint { get; set; }

    /// <summary>Columns, lists, record numbers, marks: <see cref="Manifest"/> as JSON, compressed.</summary>
    public required byte[] Manifest { get; set; }

    /// <summary>Counts per column, shown without reading any column: JSON, compressed.</summary>
    public required byte[] Summary { get; set; }
}

/// <summary>Compressed bytes addressed by the hash of what they hold.</summary>
internal sealed class ChunkRow
{
    public long Id { get; set; }

    public required byte[] Hash { get; set; }

    public required byte[] Payload { get; set; }
}

/// <summary>The chunks of one column, addressed by content, so that revisions share unchanged columns.</summary>
internal sealed class ColumnListRow
{
    public long Id { get; set; }

    public required byte[] Hash { get; set; }

    /// <summary>Chunk ids, eight bytes each, little-endian.</summary>
    public required byte[] Chunks { get; set; }
}

/// <summary>An uploaded file; its bytes lie in the folder of sources under their hash.</summary>
internal sealed class SourceRow
{
    public long Id { get; set; }

    public required string RunSetId { get; set; }

    public int Number { get; set; }

    public required string FileName { get; set; }

    public long Bytes { get; set; }

    public required string Hash { get; set; }

    public int Revision { get; set; }
}

internal sealed class SliceRow
{
    public long Id { get; set; }

    public required string RunSetId { get; set; }

    public required string Name { get; set; }

    public required string Conditions { get; set; }
}

internal sealed class PinRow
{
    public long Id { get; set; }

    public required string RunSetId { get; set; }

    public int Place { get; set; }

    public required string Result { get; set; }

    public required string By { get; set; }

    public DateTime At { get; set; }
}

/// <summary>A write that was done under a client's key.</summary>
internal sealed class RepeatKeyRow
{
    public required string Key { get; set; }

    public required string RunSetId { get; set; }

    public int Revision { get; set; }

    public DateTime At { get; set; }
}
