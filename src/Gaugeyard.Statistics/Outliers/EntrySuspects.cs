using System.Globalization;

namespace Gaugeyard.Statistics.Outliers;

/// <summary>What kind of slip would explain a value.</summary>
public enum EntrySlip
{
    /// <summary>The decimal mark stands one to three places off.</summary>
    ShiftedDecimal,

    /// <summary>The value was given in another unit.</summary>
    OtherUnit,

    /// <summary>Two neighbouring digits changed places.</summary>
    TransposedDigits,

    /// <summary>The sign is missing or too much.</summary>
    Sign,
}

/// <summary>Another way to read a value, were it given in another unit.</summary>
/// <param name="Unit">The other unit, for people.</param>
/// <param name="Read">What the value means in the column's own unit, had it been given in the other.</param>
public sealed record UnitReading(string Unit, Func<double, double> Read);

/// <summary>A slip that would explain a value. A suspicion, never a proof.</summary>
/// <param name="WouldBe">The value without the slip, in the column's unit.</param>
/// <param name="Unit">The other unit for <see cref="EntrySlip.OtherUnit"/>, else null.</param>
public sealed record EntrySuspicion(EntrySlip Slip, double WouldBe, string? Unit);

/// <summary>
/// Looks for a usual slip of the hand that would turn a value that stands off into an ordinary one. Says nothing unless the value is far off and the
/// corrected one fits well; several slips may fit, the best fitting one is named.
/// </summary>
public static class EntrySuspects
{
    /// <summary>A value must lie this many standard deviations off before a slip is thought of.</summary>
    public const double Far = 4;

    /// <summary>The value without the slip must lie within this many standard deviations.</summary>
    public const double Near = 2;

    /// <summary>The most likely slip, or null.</summary>
    /// <param name="value">The value that stands off.</param>
    /// <param name="expected">What its like make likely.</param>
    /// <param name="spread">Standard deviation of that, above 0.</param>
    /// <param name="units">Other units in which such a reading is given.</param>
    public static EntrySuspicion? Find(double value, double expected, double spread, IReadOnlyList<UnitReading>? units = null)
    {
        if (!(spread > 0))
            throw new ArgumentOutOfRangeException(nameof(spread), spread, "spread must be above 0");
        if (!double.IsFinite(value) || Math.Abs(value - expected) < Far * spread || value == 0)
            return null;
        EntrySuspicion? best = null;
        double closest = Near * spread;
        void Try(EntrySlip slip, double wouldBe, string? unit = null, double handicap = 0)
        {
            // a metric unit differs by a power of ten: the unit is then the better reason
            bool same = slip == EntrySlip.OtherUnit && best is not null && Math.Abs(wouldBe - best.WouldBe) <= 1e-9 * Math.Abs(wouldBe);
            double off = same ? Math.BitDecrement(closest) : Math.Abs(wouldBe - expected) + handicap * spread;
            if (double.IsFinite(wouldBe) && wouldBe != value && off < closest)
            {
                closest = off;
                best = new EntrySuspicion(slip, wouldBe, unit);
            }
        }

        // a power of ten is the commonest slip; a named unit next; with so many ways to transpose digits one of them fits by chance, hence the handicaps
        foreach (int places in (ReadOnlySpan<int>)[1, -1, 2, -2, 3, -3])
            Try(EntrySlip.ShiftedDecimal, Shift(value, places));
        foreach (var unit in units ?? [])
            Try(EntrySlip.OtherUnit, unit.Read(value), unit.Unit, 0.25);
        Try(EntrySlip.Sign, -value, null, 0.25);
        foreach (double swapped in Transposed(value))
            Try(EntrySlip.TransposedDigits, swapped, null, 1);
        return best;
    }

    /// <summary>Moves the decimal mark in the written number, so that 58.1 becomes 5.81 and not 5.8100000000000005.</summary>
    private static double Shift(double value, int places)
    {
        string text = value.ToString("R", CultureInfo.InvariantCulture);
        int e = text.IndexOf('E', StringComparison.Ordinal);
        int exponent = e < 0 ? 0 : int.Parse(text[(e + 1)..], CultureInfo.InvariantCulture);
        return double.Parse($"{(e < 0 ? text : text[..e])}E{exponent + places}", NumberStyles.Float, CultureInfo.InvariantCulture);
    }

    private static IEnumerable<double> Transposed(double value)
    {
        string text = value.ToString("R", CultureInfo.InvariantCulture);
        // more digits than people write by hand come from a computation, not from a hand
        if (text.Contains('E', StringComparison.Ordinal) || text.Count(char.IsAsciiDigit) > 7)
            yield break;
        char[] digits = text.ToCharArray();
        for (int i = 0, j; i < digits.Length - 1; i++)
        {
            if (!char.IsAsciiDigit(digits[i]))
                continue;
            j = i + 1;
            if (digits[j] == '.' && j + 1 < digits.Length)
                j++;
            if (!char.IsAsciiDigit(digits[j]) || digits[i] == digits[j])
                continue;
            (digits[i], digits[j]) = (digits[j], digits[i]);
            yield return double.Parse(digits, NumberStyles.Float, CultureInfo.InvariantCulture);
            (digits[i], digits[j]) = (digits[j], digits[i]);
        }
    }
}
