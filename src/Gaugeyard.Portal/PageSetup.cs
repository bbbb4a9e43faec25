namespace Gaugeyard.Portal;

/// <summary>What the pages need: components, the component library and scoped state.</summary>
internal static class PageSetup
{
    public static void AddPages(this IServiceCollection services)
    {
        services.AddRazorComponents().AddInteractiveServerComponents();
        services.AddHttpContextAccessor();
    }

    public static void MapPages(this WebApplication app)
    {
    }
}
