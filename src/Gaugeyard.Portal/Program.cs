using Gaugeyard.Analysis.Work;
using Gaugeyard.Portal;
using Gaugeyard.Portal.Access;
using Gaugeyard.Portal.Api;
using Gaugeyard.Portal.Incoming;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Storage;

var builder = WebApplication.CreateBuilder(args);
builder.WebHost.UseStaticWebAssets();
var settings = builder.Configuration.GetSection("Gaugeyard").Get<PortalSettings>() ?? new PortalSettings();
builder.WebHost.ConfigureKestrel(k => k.Limits.MaxRequestBodySize = settings.Limits.FileBytes + (1 << 20));

builder.Services.AddSingleton(settings);
builder.Services.AddSingleton(TimeProvider.System);
builder.Services.AddSingleton<ICurrentUser, LocalUser>();
builder.Services.AddRunSetStore(new StorageOptions(Path.GetFullPath(settings.Data, builder.Environment.ContentRootPath)));
builder.Services.AddSingleton<Answerer>();
builder.Services.AddSingleton<JobBoard>();
builder.Services.AddSingleton(new WaitingFiles(Path.Combine(Path.GetFullPath(settings.Data, builder.Environment.ContentRootPath), "waiting")));
builder.Services.AddSingleton<Intake>();
builder.Services.AddHostedService<StartUp>();
builder.Services.AddHealthChecks().AddCheck<StartUpCheck>("store", tags: ["ready"]);
builder.Services.ConfigureHttpJsonOptions(o => WireFormat.Apply(o.SerializerOptions));
builder.Services.AddExceptionHandler<Problems>();
builder.Services.AddProblemDetails();
builder.Services.AddOpenApi("v1");
builder.Services.AddPages();

var app = builder.Build();
NetworkGuard.Apply(app, settings);
app.UseExceptionHandler("/failure", createScopeForErrors: true);
app.UseMiddleware<SafeHeaders>();
app.UseAntiforgery();
app.MapStaticAssets();
app.MapHealth();
app.MapApi();
app.MapIncoming();
app.MapPages();
await app.RunAsync();

/// <summary>Lets tests start the portal in-process.</summary>
public partial class Program;
