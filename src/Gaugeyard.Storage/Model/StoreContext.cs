using Microsoft.EntityFrameworkCore;

namespace Gaugeyard.Storage.Model;

/// <summary>The tables of the store. One context per operation, never shared between threads.</summary>
internal sealed class StoreContext(DbContextOptions<StoreContext> options) : DbContext(options)
{
    public DbSet<RunSetRow> RunSets => Set<RunSetRow>();

    public DbSet<RevisionRow> Revisions => Set<RevisionRow>();

    public DbSet<ChunkRow> Chunks => Set<ChunkRow>();

    public DbSet<ColumnListRow> ColumnLists => Set<ColumnListRow>();

    public DbSet<SourceRow> Sources => Set<SourceRow>();

    public DbSet<SliceRow> Slices => Set<SliceRow>();

    public DbSet<PinRow> Pins => Set<PinRow>();

    public DbSet<RepeatKeyRow> RepeatKeys => Set<RepeatKeyRow>();

    protected override void OnModelCreating(ModelBuilder modelBuilder)
    {
        modelBuilder.Entity<RunSetRow>().ToTable("RunSets").HasKey(x => x.Id);
        modelBuilder.Entity<RevisionRow>(e =>
        {
            e.ToTable("Revisions");
            e.HasIndex(x => new { x.RunSetId, x.Number }).IsUnique();
        });
        modelBuilder.Entity<ChunkRow>(e =>
        {
            e.ToTable("Chunks");
            e.HasIndex(x => x.Hash).IsUnique();
        });
        modelBuilder.Entity<ColumnListRow>(e =>
        {
            e.ToTable("ColumnLists");
            e.HasIndex(x => x.Hash).IsUnique();
        });
        modelBuilder.Entity<SourceRow>(e =>
        {
            e.ToTable("Sources");
            e.HasIndex(x => new { x.RunSetId, x.Number }).IsUnique();
        });
        modelBuilder.Entity<SliceRow>(e =>
        {
            e.ToTable("Slices");
            e.HasIndex(x => new { x.RunSetId, x.Name }).IsUnique();
        });
        modelBuilder.Entity<PinRow>(e =>
        {
            e.ToTable("Pins");
            e.HasIndex(x => x.RunSetId);
        });
        modelBuilder.Entity<RepeatKeyRow>().ToTable("RepeatKeys").HasKey(x => x.Key);
    }
}
