using Gaugeyard.Portal.Incoming;
using Gaugeyard.Storage;
using Microsoft.Extensions.Diagnostics.HealthChecks;

namespace Gaugeyard.Portal;

/// <summary>Prepares the store before the first request, loads the demo season into an empty one, and says where the portal is.</summary>
internal sealed class StartUp(IServiceProvider services, PortalSettings settings, IHostApplicationLifetime life, IWebHostEnvironment environment, ILogger<StartUp> log) : IHostedService
{
    public async Task StartAsync(CancellationToken cancellationToken)
    {
        services.GetRequiredService<WaitingFiles>().Clear();
        await services.PrepareRunSetStoreAsync(cancellationToken);
        if (settings.Demo)
            await services.GetRequiredService<Intake>().LoadDemoAsync(Path.Combine(environment.ContentRootPath, "demo-data"), cancellationToken);
        StartUpCheck.Ready = true;
        life.ApplicationStarted.Register(() =>
        {
            var addresses = services.GetRequiredService<Microsoft.AspNetCore.Hosting.Server.IServer>().Features.Get<Microsoft.AspNetCore.Hosting.Server.Features.IServerAddressesFeature>()?.Addresses;
            if (log.IsEnabled(LogLevel.Information))
                log.LogInformation("Gaugeyard is open at {Addresses}", string.Join(", ", addresses ?? []));
        });
    }

    public Task StopAsync(CancellationToken cancellationToken) => Task.CompletedTask;
}

/// <summary>Ready once the store is prepared.</summary>
internal sealed class StartUpCheck : IHealthCheck
{
    public static bool Ready { get; set; }

    public Task<HealthCheckResult> CheckHealthAsync(HealthCheckContext context, CancellationToken cancellationToken = default) =>
        Task.FromResult(Ready ? HealthCheckResult.Healthy() : HealthCheckResult.Unhealthy("the store is being prepared"));
}

internal static class Health
{
    public static void MapHealth(this WebApplication app)
    {
        app.MapHealthChecks("/health/live", new() { Predicate = _ => false });
        app.MapHealthChecks("/health/ready", new() { Predicate = c => c.Tags.Contains("ready") });
    }
}
