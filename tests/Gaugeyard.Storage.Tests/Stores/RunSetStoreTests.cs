using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Microsoft.Data.Sqlite;
using Xunit;

namespace Gaugeyard.Storage.Tests.Stores;

public sealed class RunSetStoreTests
{
    [Fact]
    public async Task What_was_stored_is_there_after_reopening_with_every_revision()
    {
        using var test = new TestStore();
        var draft = TestStore.Season();
        var made = await test.Store.CreateAsync("season", "", draft);
        var content = (await test.Store.OpenAsync(made.Id))!;
        int missing = Enumerable.Range(0, content.Count).First(content.Column("city").IsMissing);
        await test.Store.CommitAsync(made.Id, 1, RunSetEdits.Correct(content, [new Correction(1, "city", 99.5, "re-read")]));
        await test.Store.CommitAsync(made.Id, 2, RunSetEdits.Fill((await test.Store.OpenAsync(made.Id))!, "city", [new FilledCell(missing + 1, 7, 6, 8)], "group-mean", 0.95, "filled"));
        test.Reopen();

        var third = (await test.Store.OpenAsync(made.Id))!;
        Assert.Equal(3, third.Revision);
        Assert.Equal(99.5, third.Column("city").ValueAt(0));
        Assert.Equal(CellState.Filled, third.StateOf(third.Column("city"), missing));
        Assert.Equal((6.0, 8.0), (third.MarksOf("city")[missing + 1].Low, third.MarksOf("city")[missing + 1].High));
        var first = (await test.Store.OpenAsync(made.Id, 1))!;
        foreach (var column in draft.Columns)
            for (int row = 0; row < column.Count; row += 37)
                Assert.Equal(column.TextAt(row), first.Column(column.Name).TextAt(row));
        var info = (await test.Store.FindAsync(made.Id))!;
        Assert.Equal((200_000, 97, 1), (info.Records, info.Vehicles, info.Columns[2].Filled));
        Assert.Equal(["import", "correction", "fill"], (await test.Store.LedgerAsync(made.Id)).Select(e => e.Kind));
    }

    [Fact]
    public async Task A_correction_writes_one_chunk_and_shares_the_rest()
    {
        using var test = new TestStore();
        var made = await test.Store.CreateAsync("season", "", TestStore.Season());
        long before = Count(test, "Chunks");
        await test.Store.CommitAsync(made.Id, 1, RunSetEdits.Correct((await test.Store.OpenAsync(made.Id))!, [new Correction(70_000, "city", 1.25, "re-read")]));
        // one chunk of values and one of marks
        Assert.Equal(before + 2, Count(test, "Chunks"));
    }

    [Fact]
    public async Task The_second_of_two_writers_is_told_and_nothing_is_overwritten()
    {
        using var test = new TestStore();
        var made = await test.Store.CreateAsync("season", "", TestStore.Season(100));
        var content = (await test.Store.OpenAsync(made.Id))!;
        var mine = RunSetEdits.Correct(content, [new Correction(1, "city", 1, "mine")]);
        var theirs = RunSetEdits.Correct(content, [new Correction(1, "city", 2, "theirs")]);
        await test.Store.CommitAsync(made.Id, 1, theirs);
        var error = await Assert.ThrowsAsync<StaleRevisionException>(() => test.Store.CommitAsync(made.Id, 1, mine));
        Assert.Equal(2, error.Actual);
        Assert.Equal(2.0, (await test.Store.OpenAsync(made.Id))!.Column("city").ValueAt(0));
    }

    [Fact]
    public async Task A_repeated_key_does_nothing_twice()
    {
        using var test = new TestStore();
        var first = await test.Store.CreateAsync("season", "", TestStore.Season(100), new WriteOptions("key-1"));
        var again = await test.Store.CreateAsync("season", "", TestStore.Season(100), new WriteOptions("key-1"));
        Assert.Equal(first.Id, again.Id);
        Assert.Single(await test.Store.ListAsync());
        var edit = RunSetEdits.Correct((await test.Store.OpenAsync(first.Id))!, [new Correction(1, "city", 1, "once")]);
        await test.Store.CommitAsync(first.Id, 1, edit, new WriteOptions("key-2"));
        Assert.Equal(2, (await test.Store.CommitAsync(first.Id, 1, edit, new WriteOptions("key-2"))).Revision);
        Assert.Equal(2, (await test.Store.LedgerAsync(first.Id)).Count);
    }

    [Fact]
    public async Task A_stopped_write_leaves_nothing()
    {
        using var test = new TestStore();
        using var stop = new CancellationTokenSource();
        stop.Cancel();
        await Assert.ThrowsAnyAsync<OperationCanceledException>(() => test.Store.CreateAsync("season", "", TestStore.Season(100), cancel: stop.Token));
        Assert.Empty(await test.Store.ListAsync());
        Assert.Equal(0, Count(test, "Chunks"));
    }

    [Fact]
    public async Task Each_ledger_entry_is_sealed_to_the_one_before()
    {
        using var test = new TestStore();
        var made = await test.Store.CreateAsync("season", "", TestStore.Season(100));
        await test.Store.CommitAsync(made.Id, 1, RunSetEdits.Correct((await test.Store.OpenAsync(made.Id))!, [new Correction(1, "city", 1, "a")]));
        var ledger = await test.Store.LedgerAsync(made.Id);
        Assert.NotEqual(ledger[0].Fingerprint, ledger[1].Fingerprint);
        Assert.All(ledger, e => Assert.Equal(64, e.Fingerprint.Length));
        Assert.All(ledger, e => Assert.Equal("tester", e.By));
    }

    [Fact]
    public async Task Files_slices_pins_and_the_bin_keep_what_they_were_given()
    {
        using var test = new TestStore();
        string waiting = Path.Combine(test.Folder, "waiting.bin");
        await File.WriteAllBytesAsync(waiting, [1, 2, 3]);
        var made = await test.Store.CreateAsync("season", "", TestStore.Season(100) with { Files = [new IncomingFile("../../evil.csv", waiting)] });
        var (file, bytes) = (await test.Store.OpenSourceAsync(made.Id, 1))!.Value;
        await using (bytes)
        {
            var copy = new byte[3];
            await bytes.ReadExactlyAsync(copy);
            Assert.Equal([1, 2, 3], copy);
        }
        Assert.Equal("../../evil.csv", file.FileName);
        Assert.Single(Directory.GetFiles(Path.Combine(test.Folder, "sources")));

        await test.Store.KeepSliceAsync(made.Id, new Slice("dry", [new SliceCondition("city") { State = CellState.Measured }]));
        Assert.Equal(CellState.Measured, (await test.Store.SlicesAsync(made.Id)).Single().Conditions.Single().State);

        var a = await test.Store.PinAsync(made.Id, new NewPin("Groups", "groups?by=class", "a", "basis") { Figures = [["class", "mean"], ["van", "9.1"]] });
        var b = await test.Store.PinAsync(made.Id, new NewPin("Curves", "curves", "b", "basis"));
        await test.Store.MovePinAsync(made.Id, b.Id, 0);
        Assert.Equal([b.Id, a.Id], (await test.Store.PinsAsync(made.Id)).Select(p => p.Id));

        Assert.True(await test.Store.DeleteAsync(made.Id));
        Assert.Null(await test.Store.OpenAsync(made.Id));
        Assert.True(await test.Store.UndeleteAsync(made.Id));
        Assert.NotNull(await test.Store.OpenAsync(made.Id));
    }

    private static long Count(TestStore test, string table)
    {
        using var connection = new SqliteConnection($"Data Source={Path.Combine(test.Folder, "gaugeyard.db")}");
        connection.Open();
        using var command = connection.CreateCommand();
        command.CommandText = $"SELECT COUNT(*) FROM {table}";
        return (long)command.ExecuteScalar()!;
    }
}
