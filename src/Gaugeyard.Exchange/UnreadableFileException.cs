namespace Gaugeyard.Exchange;

/// <summary>
/// A file cannot be taken in as it is. The message is one plain sentence for the person who chose the file: what is wrong,
/// where, and what to do. Besides cancellation it is the only exception that leaves the readers.
/// </summary>
public sealed class UnreadableFileException : Exception
{
    public UnreadableFileException(string message)
        : base(message)
    {
    }

    public UnreadableFileException(string message, Exception inner)
        : base(message, inner)
    {
    }
}
