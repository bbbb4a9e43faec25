namespace Gaugeyard.Exchange.Handover;

/// <summary>How a cell looks; every look also has words in a companion column.</summary>
internal enum CellLook
{
    Plain = 0,
    Heading = 1,
    Date = 2,
    Filled = 3,
    Corrected = 4,
    SetAside = 5,
    FilledDate = 6,
    CorrectedDate = 7,
    SetAsideDate = 8,
    Wrapped = 9,
}

/// <summary>Bounds of the file format.</summary>
internal static class SheetBounds
{
    public const int Rows = 1_048_576, Columns = 16_384, CellCharacters = 32_767;

    // serial days before 61 are counted differently by different programs (a leap day that never was), and a double holds no more than milliseconds safely
    public static bool HoldsDate(long ticks) => ticks >= new DateTime(1900, 3, 1).Ticks && ticks % TimeSpan.TicksPerSecond == 0 && DateTime.FromOADate(new DateTime(ticks).ToOADate()).Ticks == ticks;
}
