using System.Globalization;
using System.Text.RegularExpressions;
using Xunit;

namespace Gaugeyard.Portal.Tests.Look;

/// <summary>Contrast of the portal's colours as WCAG 2.2 defines it: text at least 4.5 to 1, marks at least 3 to 1.</summary>
public sealed partial class ContrastTests
{
    private static readonly string[] Text = ["ink", "ink-2", "ink-3", "accent", "estimate", "stand-out", "bad", "good"];
    private static readonly string[] Marks = ["g1", "g2", "g3", "g4", "g5", "g6", "g7", "g8", "accent", "stand-out"];

    [Theory]
    [InlineData(false)]
    [InlineData(true)]
    public void Text_and_marks_can_be_told_from_their_ground(bool dark)
    {
        var colours = Tokens(dark);
        foreach (string ground in new[] { "paper", "sheet" })
        {
            Assert.All(Text, t => Assert.True(Contrast(colours[t], colours[ground]) >= 4.5, $"{t} on {ground}: {Contrast(colours[t], colours[ground]):0.00}"));
            Assert.All(Marks, m => Assert.True(Contrast(colours[m], colours[ground]) >= 3, $"{m} on {ground}: {Contrast(colours[m], colours[ground]):0.00}"));
        }
        Assert.True(Contrast(colours["on-accent"], colours["accent"]) >= 4.5);
        Assert.True(Contrast(colours["ink"], colours["estimate-soft"]) >= 4.5);
        Assert.True(Contrast(colours["ink-2"], colours["accent-soft"]) >= 4.5);
    }

    private static Dictionary<string, string> Tokens(bool dark)
    {
        string folder = AppContext.BaseDirectory;
        while (!File.Exists(Path.Combine(folder, "Gaugeyard.slnx")))
            folder = Path.GetDirectoryName(folder) ?? throw new FileNotFoundException("the repository's root was not found");
        string css = File.ReadAllText(Path.Combine(folder, "wwwroot", "shell", "gaugeyard.css"));
        string block = css[css.IndexOf(dark ? ":root[data-theme=\"dark\"] {" : ":root {", StringComparison.Ordinal)..];
        return Token().Matches(block[..block.IndexOf('}')]).ToDictionary(m => m.Groups[1].Value, m => m.Groups[2].Value);
    }

    private static double Contrast(string a, string b)
    {
        double x = Luminance(a), y = Luminance(b);
        return (Math.Max(x, y) + 0.05) / (Math.Min(x, y) + 0.05);
    }

    private static double Luminance(string hex)
    {
        double Channel(int at)
        {
            double c = int.Parse(hex.AsSpan(at, 2), NumberStyles.HexNumber) / 255.0;
            return c <= 0.04045 ? c / 12.92 : Math.Pow((c + 0.055) / 1.055, 2.4);
        }
        return 0.2126 * Channel(0) + 0.7152 * Channel(2) + 0.0722 * Channel(4);
    }

    [GeneratedRegex("--([a-z0-9-]+): #([0-9a-f]{6});")]
    private static partial Regex Token();
}
