using Microsoft.EntityFrameworkCore;
using Microsoft.EntityFrameworkCore.Design;

namespace Gaugeyard.Storage.Model;

/// <summary>Lets the migration tool make a context without a host: <c>dotnet ef migrations add Name --project src/Gaugeyard.Storage</c>.</summary>
internal sealed class DesignTimeContext : IDesignTimeDbContextFactory<StoreContext>
{
    public StoreContext CreateDbContext(string[] args) =>
        new(new DbContextOptionsBuilder<StoreContext>().UseSqlite("Data Source=design.db").Options);
}
