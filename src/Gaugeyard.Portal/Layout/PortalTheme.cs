using MudBlazor;

namespace Gaugeyard.Portal.Layout;

/// <summary>The component library's theme, from the same tokens as wwwroot/shell/gaugeyard.css.</summary>
public static class PortalTheme
{
    public static MudTheme Theme { get; } = new()
    {
        PaletteLight = new PaletteLight
        {
            Primary = "#0b5d6b",
            PrimaryContrastText = "#ffffff",
            Secondary = "#b3401a",
            Background = "#fbfaf6",
            Surface = "#ffffff",
            TextPrimary = "#1c2630",
            TextSecondary = "#4c5a66",
            ActionDefault = "#4c5a66",
            LinesDefault = "#dcdad2",
            Error = "#a3262a",
            Success = "#2c6e49",
            Warning = "#7a5a00",
        },
        PaletteDark = new PaletteDark
        {
            Primary = "#6cc5d3",
            PrimaryContrastText = "#08262b",
            Secondary = "#ff9166",
            Background = "#14191e",
            Surface = "#1b2228",
            TextPrimary = "#e8ecef",
            TextSecondary = "#b3bec7",
            ActionDefault = "#b3bec7",
            LinesDefault = "#343e47",
            Error = "#ff8f8f",
            Success = "#7fcf9f",
            Warning = "#f0c658",
        },
        Typography = new Typography { Default = new DefaultTypography { FontFamily = ["Source Sans 3", "system-ui", "sans-serif"] } },
        LayoutProperties = new LayoutProperties { DefaultBorderRadius = "6px" },
    };
}
