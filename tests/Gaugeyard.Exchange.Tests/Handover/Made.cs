using System.Globalization;
using System.Text.Json;
using CsCheck;
using Gaugeyard.Exchange.Handover;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.Ledger;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Exchange.Tests.Handover;

/// <summary>Makes revisions to hand over: fixed ones and random ones.</summary>
internal static class Made
{
    public static HandoverContent Content(IReadOnlyList<Column> columns, Dictionary<string, Dictionary<int, CellMark>>? marks = null, Dictionary<int, string>? setAside = null)
    {
        var revision = RevisionContent.InMemory(columns, marks?.ToDictionary(m => m.Key, m => (IReadOnlyDictionary<int, CellMark>)m.Value), setAside, "set", 3, "f00d");
        var at = new DateTimeOffset(2031, 4, 7, 8, 10, 0, TimeSpan.Zero);
        var info = new RunSetInfo("set", "Ottermoor =season", "", 3, at, revision.Count, null, setAside?.Count ?? 0, [], [], 1, false, revision.Count);
        return new HandoverContent(info, revision,
        [
            new LedgerEntry(1, at, "tester", LedgerKinds.Import, "import", null, "aa"),
            new LedgerEntry(2, at, "tester", LedgerKinds.Fill, "=fill", JsonDocument.Parse("{\"seed\":7}").RootElement, "f00d"),
        ]);
    }

    public static HandoverContent Small()
    {
        Column[] columns =
        [
            CodedColumn.FromTexts(new("run", ColumnKind.Text) { Role = ColumnRole.RunName }, ["R1", "R2", "R3", "R4", "R5"]),
            CodedColumn.FromTexts(new("vehicle", ColumnKind.Category) { Role = ColumnRole.Vehicle }, ["V1", "V1", "V2", "V3", "007"]),
            CodedColumn.FromTexts(new("load", ColumnKind.OrderedCategory) { Levels = ["empty", "half", "full"] }, ["full", null, "empty", "empty", "full"]),
            CodedColumn.FromTexts(new("wet", ColumnKind.YesNo), ["no", "yes", null, "no", "no"]),
            new DateTimeColumn(new("start", ColumnKind.DateTime), [new DateTime(2031, 4, 7, 8, 10, 0).Ticks, new DateTime(1871, 5, 1).Ticks, DateTimeColumn.Missing, new DateTime(2031, 4, 7).Ticks + 1, new DateTime(1900, 1, 15).Ticks]),
            new NumberColumn(new("city", ColumnKind.Number) { Role = ColumnRole.Reading, Unit = "L/100km", MissingCodes = ["9999"] }, [9.1, 0.1 + 0.2, 7.25, double.NaN, -0.0]),
            new NumberColumn(new("mass", ColumnKind.Number) { Unit = "kg" }, [1500, 1501.5, 1e-300, double.MaxValue, 1498]),
            CodedColumn.FromTexts(new("remarks", ColumnKind.Text) { Role = ColumnRole.Note }, ["=HYPERLINK(\"x\")", "+1", "-", "@cmd", "\tindented\r\nsecond line"]),
        ];
        return Content(columns,
            new()
            {
                ["city"] = new()
                {
                    [2] = new(CellState.Filled) { Low = 0.1, High = 0.70000000000000007, Confidence = 0.95, Way = "stepwise-regression" },
                    [3] = new(CellState.Corrected) { Original = "72.5", Reason = "shifted decimal" },
                    [4] = new(CellState.Missing) { Original = "7,4?", Reason = "not a number" },
                },
                ["mass"] = new() { [4] = new(CellState.SetAside) { Reason = "scale broken" }, [5] = new(CellState.Measured) { Original = "1498*", Reason = "footnote mark '*'" } },
            },
            new() { [5] = "=wrong tyres" });
    }

    private static readonly char[] Letters = "ab Zß°µ\u00e9'\"=+-@,;|\t\r\n_x0041_<>&#\u2212\u0001\ufffe😀".Where(c => !char.IsSurrogate(c)).ToArray();

    private static Gen<T> Pick<T>(params T[] values) => Gen.Int[0, values.Length - 1].Select(i => values[i]);

    private static readonly Gen<string> Text =
        Gen.Frequency((6, Pick(Letters).Array[1, 8].Select(c => new string(c))), (2, Gen.Char.AlphaNumeric.Array[1, 6].Select(c => new string(c))), (2, Pick("n/a", "-", "NA", "'-5", "''=x", "007", "1.50", "2031-04-07", "yes", "_x000D_", "😀", "#DIV/0!", " lead", "trail ", "null", "'", "''", "'a", "inf")))
            .Where(t => !string.IsNullOrWhiteSpace(t) && !t.All(c => char.IsWhiteSpace(c) || c is '\uFEFF' or '\u200B'));

    private static readonly Gen<double> Number = Gen.Frequency((3, Gen.Double.Where(double.IsFinite)), (3, Gen.Int[-1000, 99999].Select(i => i / 100.0)), (1, Pick(0.0, -0.0, 9999, -999, 5e-324, double.MaxValue)), (2, Gen.Const(double.NaN)));

    private static readonly Gen<long> Ticks = Gen.Frequency((3, Gen.Long[0, new DateTime(9998, 12, 31).Ticks]), (3, Gen.Int[0, 200_000].Select(d => new DateTime(1850, 1, 1).AddHours(d * 7L).Ticks)), (1, Gen.Const(DateTimeColumn.Missing)));

    private static Gen<string?> Cell(Gen<string> text) => Gen.Frequency((5, text.Select(t => (string?)t)), (1, Gen.Const((string?)null)));

    /// <summary>Columns of every kind with names, values and texts that invite mistakes.</summary>
    public static readonly Gen<(Column[] Columns, int Rows)> Columns = Gen.Int[1, 12].SelectMany(rows =>
        Gen.Select(
            Number.Array[rows].Array[1, 3],
            Cell(Text).Array[rows].Array[1, 3],
            Ticks.Array[rows],
            Cell(Pick("no", "yes")).Array[rows],
            Cell(Pick("low", "mid", "HIGH", "=x")).Array[rows],
            Gen.Char.AlphaNumeric.Array[1, 5].Select(c => new string(c)))
        .Select((numbers, texts, dates, answers, steps, salt) =>
        {
            var columns = new List<Column> { CodedColumn.FromTexts(new("run", ColumnKind.Text) { Role = ColumnRole.RunName }, [.. Enumerable.Range(1, rows).Select(i => "R" + i)]) };
            for (int i = 0; i < numbers.Length; i++)
                columns.Add(new NumberColumn(new($"number {salt} {i}", ColumnKind.Number) { Unit = i == 0 ? "kg" : null }, numbers[i]));
            for (int i = 0; i < texts.Length; i++)
                columns.Add(CodedColumn.FromTexts(new($"{(i == 1 ? "=" : "")}text {salt} {i}", i == 0 ? ColumnKind.Category : ColumnKind.Text), texts[i]));
            columns.Add(new DateTimeColumn(new("date " + salt, ColumnKind.DateTime), dates));
            columns.Add(CodedColumn.FromTexts(new("answer", ColumnKind.YesNo), answers));
            columns.Add(CodedColumn.FromTexts(new("record", ColumnKind.OrderedCategory) { Levels = ["low", "mid", "HIGH", "=x", "never"] }, steps));
            return (columns.ToArray(), rows);
        }));

    /// <summary>Marks of every state on a table's number columns.</summary>
    public static HandoverContent WithMarks(Column[] columns, int rows, int seed)
    {
        var random = new Random(seed);
        var marks = new Dictionary<string, Dictionary<int, CellMark>>();
        foreach (var column in columns.OfType<NumberColumn>())
        {
            var of = marks[column.Name] = [];
            for (int row = 0; row < rows; row++)
            {
                bool missing = column.IsMissing(row);
                switch (random.Next(6))
                {
                    case 0 when !missing:
                        of[row + 1] = new CellMark(CellState.Filled) { Low = column.Values[row] - random.NextDouble(), High = column.Values[row] + random.NextDouble(), Way = "group-mean", Confidence = 0.9, Overridden = random.Next(2) == 0 };
                        break;
                    case 1 when !missing:
                        of[row + 1] = new CellMark(CellState.Corrected) { Original = "=was", Reason = "why, \"quoted\"" };
                        break;
                    case 2:
                        of[row + 1] = new CellMark(CellState.SetAside) { Reason = "aside" };
                        break;
                }
            }
        }
        var setAside = new Dictionary<int, string>();
        if (random.Next(2) == 0)
            setAside[random.Next(rows) + 1] = "record aside: +1";
        return Content(columns, marks, setAside);
    }

    public static byte[] Bytes(Action<Stream> write)
    {
        using var memory = new MemoryStream();
        write(memory);
        return memory.ToArray();
    }
}
