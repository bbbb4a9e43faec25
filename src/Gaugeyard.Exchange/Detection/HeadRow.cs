namespace Gaugeyard.Exchange.Detection;

/// <summary>A row of the file's beginning.</summary>
/// <param name="Number">Row of the sheet, or first line of the text file, from 1.</param>
/// <param name="Cells">Its cells as text.</param>
internal sealed record HeadRow(int Number, string[] Cells)
{
    public int Filled { get; } = Cells.Count(c => !string.IsNullOrWhiteSpace(c));

    public string At(int column) => column < Cells.Length ? Cells[column] : "";

    /// <summary>The row's cells in one line, for showing.</summary>
    public string Text => Blanks.OneLine(string.Join(" | ", Cells.Where(c => !string.IsNullOrWhiteSpace(c)).Select(c => c.Trim())), 120);
}
