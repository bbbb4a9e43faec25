using System.Collections.Frozen;

namespace Gaugeyard.Exchange.Detection;

/// <summary>Texts that usually mean that there is no value. Zero is never among them.</summary>
internal static class MissingText
{
    // whatever the column holds
    private static readonly FrozenSet<string> Always = new[]
    {
        "?", "??", "-", "--", "---", "–", "—", "−", ".", "..", "...", "*", "n/a", "n.a.", "n. a.", "na", "#n/a", "#na", "#div/0!", "#value!", "#ref!", "#num!", "#null!", "#name?", "#calc!", "#spill!", "null", "nan", "<na>", "k.a.", "n/k", "n/v",
    }.ToFrozenSet(StringComparer.OrdinalIgnoreCase);

    // only where the column is otherwise numbers or dates; in words they may be levels of their own
    private static readonly FrozenSet<string> AmongNumbers = new[]
    {
        "none", "missing", "tbd", "tba", "void", "nil", "x", "unknown", "not measured", "not recorded", "no data", "nd", "n.d.", "blank", "error", "err", "fail", "failed", "invalid", "dropout", "lost", "xx", "xxx", "-.-", "-,-", "ovr", "ol", "o.l.", "keine angabe",
    }.ToFrozenSet(StringComparer.OrdinalIgnoreCase);

    public static bool IsUsual(string trimmed, bool amongNumbers) => trimmed.Length <= 14 && (Always.Contains(trimmed) || amongNumbers && AmongNumbers.Contains(trimmed));
}
