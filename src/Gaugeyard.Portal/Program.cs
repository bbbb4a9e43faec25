var app = WebApplication.CreateBuilder(args).Build(); app.MapGet("/health/live", () => "ok"); app.Run();
