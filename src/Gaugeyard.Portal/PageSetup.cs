using Gaugeyard.Portal.Layout;
using MudBlazor.Services;

namespace Gaugeyard.Portal;

/// <summary>What the pages need: components, the component library and scoped state.</summary>
internal static class PageSetup
{
    public static void AddPages(this IServiceCollection services)
    {
        services.AddRazorComponents().AddInteractiveServerComponents();
        services.AddMudServices();
        services.AddScoped<Desk>();
        services.AddScoped<Browser>();
    }

    public static void MapPages(this WebApplication app)
    {
        app.UseStatusCodePagesWithReExecute("/not-found");
        app.MapRazorComponents<App>().AddInteractiveServerRenderMode(o => o.ContentSecurityFrameAncestorsPolicy = "'none'");
    }
}
