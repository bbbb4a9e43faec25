using System.Globalization;
using Gaugeyard.Analysis.Wording;

namespace Gaugeyard.Portal.Plots;

/// <summary>A linear axis from values to px, with round ticks.</summary>
public sealed class Axis
{
    /// <param name="low">Lowest value to show.</param>
    /// <param name="high">Highest value to show.</param>
    /// <param name="from">Place of the lowest value, in px.</param>
    /// <param name="to">Place of the highest value, in px.</param>
    /// <param name="ticks">About how many ticks.</param>
    /// <param name="pad">Share of the range added at either end.</param>
    public Axis(double low, double high, double from, double to, int ticks = 6, double pad = 0.03)
    {
        if (!double.IsFinite(low) || !double.IsFinite(high))
            (low, high) = (0, 1);
        if (high <= low)
            (low, high) = (low - Math.Max(1e-9, Math.Abs(low) * 0.05 + 0.5), high + Math.Max(1e-9, Math.Abs(high) * 0.05 + 0.5));
        double room = (high - low) * pad;
        (Low, High, From, To) = (low - room, high + room, from, to);
        double raw = (High - Low) / Math.Max(1, ticks), power = Math.Pow(10, Math.Floor(Math.Log10(raw))), unit = raw / power;
        Step = power * (unit < 1.5 ? 1 : unit < 3.5 ? 2 : unit < 7.5 ? 5 : 10);
        Decimals = Math.Clamp(-(int)Math.Floor(Math.Log10(Step) + 1e-9), 0, 8);
    }

    public double Low { get; }

    public double High { get; }

    public double From { get; }

    public double To { get; }

    public double Step { get; }

    public int Decimals { get; }

    /// <summary>Place of a value, in px.</summary>
    public double At(double value) => From + (value - Low) / (High - Low) * (To - From);

    /// <summary>Round values within the range.</summary>
    public IEnumerable<double> Ticks
    {
        get
        {
            // counted, not added up: a step below the resolution of the values would never arrive
            double first = Math.Ceiling(Low / Step - 1e-9) * Step, before = double.NaN;
            int count = (int)Math.Min(100, Math.Floor((High - first) / Step + 1e-9) + 1);
            for (int i = 0; i < count; i++)
            {
                double tick = Math.Round(first + i * Step, 12);
                if (tick != before)
                    yield return before = tick;
            }
        }
    }

    /// <summary>A tick's text.</summary>
    public string Text(double tick) => Say.Number(tick, Decimals);

    /// <summary>px as attribute text.</summary>
    public static string Px(double value) => Math.Round(value, 1).ToString(CultureInfo.InvariantCulture);
}
