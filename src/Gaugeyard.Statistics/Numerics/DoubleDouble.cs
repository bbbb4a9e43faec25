using System.Runtime.CompilerServices;

namespace Gaugeyard.Statistics.Numerics;

/// <summary>
/// An unevaluated sum of two doubles, about 31 digits (Dekker 1971, Numerische Mathematik 18:224-242; products by fused
/// multiply-add). Used where a residual must be formed without losing the digits that matter.
/// </summary>
internal readonly record struct DoubleDouble(double High, double Low)
{
    public static implicit operator DoubleDouble(double value) => new(value, 0);

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static DoubleDouble operator +(DoubleDouble a, DoubleDouble b)
    {
        double s = a.High + b.High, bb = s - a.High, e = (a.High - (s - bb)) + (b.High - bb) + a.Low + b.Low;
        double high = s + e;
        return new DoubleDouble(high, e - (high - s));
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static DoubleDouble operator -(DoubleDouble a) => new(-a.High, -a.Low);

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static DoubleDouble operator *(DoubleDouble a, DoubleDouble b)
    {
        double p = a.High * b.High, e = Math.FusedMultiplyAdd(a.High, b.High, -p) + (a.High * b.Low + a.Low * b.High);
        double high = p + e;
        return new DoubleDouble(high, e - (high - p));
    }

    public double Value => High + Low;
}
