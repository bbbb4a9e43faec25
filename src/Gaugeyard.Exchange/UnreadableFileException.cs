namespace Gaugeyard.Exchange;

/// <summary>A file that cannot be read; the message is one sentence: what is wrong, where, and what to do.</summary>
public sealed class UnreadableFileException(string message) : Exception(message);
