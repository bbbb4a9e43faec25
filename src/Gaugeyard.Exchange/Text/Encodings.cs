using System.Text;
using System.Text.Unicode;

namespace Gaugeyard.Exchange.Text;

/// <summary>Recognises the encoding of a text file.</summary>
internal static class Encodings
{
    /// <summary>An encoding under the name that <see cref="ReadChoices.Encoding"/> uses.</summary>
    /// <param name="Name">For choices.</param>
    /// <param name="Label">For sentences.</param>
    /// <param name="Encoding">Throws on what it cannot decode.</param>
    /// <param name="Mark">Bytes of the byte-order mark to skip.</param>
    public sealed record Found(string Name, string Label, Encoding Encoding, int Mark);

    private static readonly UTF8Encoding Utf8 = new(false, true);

    public static Found Windows1252(int mark = 0) => new("windows-1252", "Windows-1252", CodePagesEncodingProvider.Instance.GetEncoding(1252)!, mark);

    /// <summary>Recognises the encoding by the byte-order mark, by the places of zero bytes, and by whether the bytes are valid UTF-8.</summary>
    public static Found Recognise(ReadOnlySpan<byte> head, bool whole, string? chosen, string name)
    {
        int mark = head.StartsWith((ReadOnlySpan<byte>)[0xEF, 0xBB, 0xBF]) ? 3 : head.StartsWith((ReadOnlySpan<byte>)[0xFF, 0xFE]) || head.StartsWith((ReadOnlySpan<byte>)[0xFE, 0xFF]) ? 2 : 0;
        switch (chosen?.ToLowerInvariant())
        {
            case "utf-8":
                return new Found("utf-8", "UTF-8", Utf8, mark == 3 ? 3 : 0);
            case "utf-16":
                return new Found("utf-16", "UTF-16", new UnicodeEncoding(false, false, true), mark == 2 ? 2 : 0);
            case "utf-16be":
                return new Found("utf-16be", "UTF-16 (big-endian)", new UnicodeEncoding(true, false, true), mark == 2 ? 2 : 0);
            case "windows-1252" or "latin-1" or "iso-8859-1":
                return Windows1252();
            case null:
                break;
            default:
                throw new UnreadableFileException($"{name} cannot be read as '{chosen}'; choose utf-8, utf-16, utf-16be or windows-1252.");
        }
        if (mark == 3)
            return new Found("utf-8", "UTF-8 with byte-order mark", Utf8, 3);
        if (mark == 2)
            return head[0] == 0xFF ? new Found("utf-16", "UTF-16", new UnicodeEncoding(false, false, true), 2) : new Found("utf-16be", "UTF-16 (big-endian)", new UnicodeEncoding(true, false, true), 2);
        int zeros = head.Count((byte)0);
        if (zeros > 0)
        {
            int odd = 0;
            for (int i = 1; i < head.Length; i += 2)
                odd += head[i] == 0 ? 1 : 0;
            if (odd == zeros && odd * 10 >= head.Length * 3)
                return new Found("utf-16", "UTF-16 without byte-order mark", new UnicodeEncoding(false, false, true), 0);
            if (odd == 0 && zeros * 10 >= head.Length * 3)
                return new Found("utf-16be", "UTF-16 (big-endian) without byte-order mark", new UnicodeEncoding(true, false, true), 0);
            throw NulBytes(name, Lines.Count(Encoding.Latin1.GetString(head[..head.IndexOf((byte)0)])) + 1);
        }
        if (!whole)
            head = WithoutCutCharacter(head);
        return Utf8Valid(head) ? new Found("utf-8", "UTF-8", Utf8, 0) : Windows1252();
    }

    public static UnreadableFileException NulBytes(string name, int line) =>
        new($"{name} contains NUL bytes (the first in line {line}), so it is no text file or was damaged on the way. Export it again as CSV or .xlsx.");

    private static bool Utf8Valid(ReadOnlySpan<byte> bytes) => System.Text.Unicode.Utf8.IsValid(bytes);

    private static ReadOnlySpan<byte> WithoutCutCharacter(ReadOnlySpan<byte> head)
    {
        int end = head.Length;
        while (end > 0 && head.Length - end < 4 && (head[end - 1] & 0xC0) == 0x80)
            end--;
        return end > 0 && head[end - 1] >= 0xC0 ? head[..(end - 1)] : head;
    }
}
