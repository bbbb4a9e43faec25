using System.Text.Json;
using Gaugeyard.Analysis.Pairs;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Slices;
using Gaugeyard.Statistics.Numerics;
using Xunit;

namespace Gaugeyard.Analysis.Tests.Pairs;

public sealed class StandoutsQuestionTests
{
    // Hawkins, Bradu and Kass (1984), Technometrics 26:197-208: artificial data whose first fourteen of 75 records are wild in X1, X2, X3; the file is a copy
    // of the open data set that the statistics tests use
    private static RevisionContent Hawkins()
    {
        string[] lines = File.ReadAllLines(Path.Combine(AppContext.BaseDirectory, "Pairs", "hbk.csv"));
        string[] names = [.. lines[0].Split(',').Select(n => n.Trim('"'))];
        double[][] rows = [.. lines.Skip(1).Where(l => l.Length > 0).Select(l => l.Split(',').Select(double.Parse).ToArray())];
        return RevisionContent.InMemory([.. names.Select((n, j) => (Column)Number(n, [.. rows.Select(r => r[j])]))]);
    }

    private static NumberColumn Number(string name, double[] values, string? unit = null) =>
        new(new ColumnDefinition(name, ColumnKind.Number) { Role = ColumnRole.Reading, Unit = unit }, values);

    private static CodedColumn Texts(string name, ColumnRole role, params string?[] texts) =>
        CodedColumn.FromTexts(new ColumnDefinition(name, ColumnKind.Category) { Role = role }, texts);

    [Fact]
    public void The_fourteen_wild_records_of_the_published_data_stand_off()
    {
        var answer = new StandoutsQuestion { Readings = ["X1", "X2", "X3"] }.Ask(Hawkins(), WorkContext.None);

        Assert.Equal(Enumerable.Range(1, 14), answer.Records.Select(r => r.Record).Order());
        Assert.Equal(14, answer.StandingOff);
        Assert.Null(answer.Vehicles);
        Assert.Equal(75, answer.Basis.Records);
        // reference figure computed with an independent library: squared raw distance of record 1 is 450.60641957304
        Assert.Equal(Math.Sqrt(450.60641957304), answer.Records.Single(r => r.Record == 1).Distance, 9);
        Assert.All(answer.Records, r => Assert.True(r.P < 0.01 && r.Cells.Count > 0));
        Assert.StartsWith("14 of 75 records stand off", answer.Headline, StringComparison.Ordinal);
        Assert.Equal(61, answer.WithAndWithout[0].NWithout);
    }

    [Fact]
    public void Slips_of_entry_and_causes_are_named()
    {
        var content = Fleet(slips: true);
        var answer = new StandoutsQuestion { Readings = ["City", "Highway", "Mass"], Vehicles = VehicleUse.Ignore }.Ask(content, WorkContext.None);

        var decimalSlip = answer.Records.Single(r => r.Record == 3).Details.Single(d => d.Suspicion is not null);
        Assert.Equal(("City", "a shifted decimal?"), (decimalSlip.Column, decimalSlip.Suspicion));
        var unitSlip = answer.Records.Single(r => r.Record == 8).Details.Single(d => d.Suspicion is not null);
        Assert.Equal(("Mass", "entered in lb?"), (unitSlip.Column, unitSlip.Suspicion));
        Assert.Contains("would fit as", answer.Records.Single(r => r.Record == 3).Why, StringComparison.Ordinal);
        var brake = answer.Explanations[0];
        Assert.Equal(("Brake", "dragging"), (brake.Column, brake.Level));
        Assert.True(brake.ShareIn > 0.7 && brake.ShareOut < 0.02 && brake.P < 1e-6);
        Assert.Contains(answer.Explanations, e => e.Column == "Tyre pressure" && e.Level is null && e.Shift < -2);
        Assert.DoesNotContain(answer.Explanations, e => e.Column == "Route");
        Assert.Contains(answer.Notes, n => n.Contains("stands alone", StringComparison.Ordinal));
    }

    [Fact]
    public void Vehicles_are_judged_first_where_they_repeat()
    {
        var answer = new StandoutsQuestion { Readings = ["City", "Highway", "Mass"] }.Ask(Fleet(slips: false), WorkContext.None);

        Assert.NotNull(answer.Vehicles);
        Assert.Equal(["V00", "V01", "V02", "V03"], answer.Vehicles.Select(v => v.Vehicle).Order());
        Assert.All(answer.Vehicles, v => Assert.Equal(6, v.Runs));
        Assert.Contains("4 of 60 vehicles stand off", answer.Headline, StringComparison.Ordinal);
        Assert.Equal("vehicles", answer.Explanations.First(e => e.Column == "Brake").Counted);
        Assert.Equal(60, answer.Correlations[0].N);
    }

    [Fact]
    public void Among_its_like_a_level_of_its_own_is_not_a_stand_out()
    {
        var content = TwoKinds();
        var together = new StandoutsQuestion { Readings = ["City", "Highway"] }.Ask(content, WorkContext.None);
        var apart = new StandoutsQuestion { Readings = ["City", "Highway"], Among = "Powertrain" }.Ask(content, WorkContext.None);

        Assert.True(together.StandingOff >= 30);
        Assert.Contains(together.Explanations, e => e.Level == "hybrid");
        Assert.Equal([1], apart.Records.Select(r => r.Record));
    }

    [Fact]
    public void Missing_readings_and_the_slice_are_counted()
    {
        double[] a = Draw(40, 1, 0), b = Draw(40, 2, 0);
        a[4] = double.NaN;
        b[7] = double.NaN;
        var content = RevisionContent.InMemory([Number("A", a), Number("B", b), Texts("Kind", ColumnRole.Attribute, [.. Enumerable.Range(0, 40).Select(i => i < 30 ? "x" : "y")])]);
        var slice = new SliceCondition("Kind") { Is = [JsonSerializer.SerializeToElement("x")] };
        var answer = new StandoutsQuestion { Readings = ["A", "B"], Slice = [slice] }.Ask(content, WorkContext.None);

        Assert.Equal(28, answer.Basis.Records);
        Assert.Equal([new LeftOut("outside the slice", 10), new LeftOut("A missing", 1), new LeftOut("B missing", 1)], answer.Basis.LeftOut);
        Assert.Equal(28, answer.Correlations[0].N);
    }

    [Fact]
    public void What_cannot_be_judged_is_refused_with_a_reason()
    {
        var content = RevisionContent.InMemory([Number("A", Draw(20, 1, 0)), Number("Twice", Array.ConvertAll(Draw(20, 1, 0), v => 2 * v)), Number("Same", new double[20]), Number("C", Draw(20, 3, 0)), Texts("Kind", ColumnRole.Attribute, new string?[20])]);
        string Refusal(params string[] readings) => Assert.Throws<CannotAnswerException>(() => new StandoutsQuestion { Readings = readings }.Ask(content, WorkContext.None)).Message;

        Assert.Contains("Same has the same value", Refusal("A", "Same"), StringComparison.Ordinal);
        Assert.Contains("follows exactly", Refusal("A", "Twice"), StringComparison.Ordinal);
        var few = RevisionContent.InMemory([Number("A", [1, 2, 3]), Number("B", [2, 1, 5])]);
        Assert.Contains("Only 3 records", Assert.Throws<CannotAnswerException>(() => new StandoutsQuestion { Readings = ["A", "B"] }.Ask(few, WorkContext.None)).Message, StringComparison.Ordinal);
        Assert.Throws<QuestionException>(() => new StandoutsQuestion { Readings = ["A", "Kind"] }.Ask(content, WorkContext.None));
        Assert.Throws<QuestionException>(() => new StandoutsQuestion { Readings = ["A", "A"] }.Ask(content, WorkContext.None));
        Assert.Throws<QuestionException>(() => new StandoutsQuestion { Readings = ["Nothing"] }.Ask(content, WorkContext.None));
        Assert.Throws<QuestionException>(() => new StandoutsQuestion { Readings = ["A"], Cut = 0 }.Ask(content, WorkContext.None));
        Assert.Throws<QuestionException>(() => new StandoutsQuestion { Readings = [] }.Ask(content, WorkContext.None));
    }

    [Fact]
    public void Ordinary_records_are_mostly_left_in_peace()
    {
        double[] a = Draw(500, 4, 0), b = [.. Draw(500, 5, 0).Select((v, i) => v + a[i])];
        var answer = new StandoutsQuestion { Readings = ["A", "B"] }.Ask(RevisionContent.InMemory([Number("A", a), Number("B", b)]), WorkContext.None);
        Assert.InRange(answer.StandingOff, 0, 4);
        Assert.Empty(answer.Explanations);
    }

    [Fact]
    public void The_same_question_gets_the_same_answer()
    {
        var question = new StandoutsQuestion { Readings = ["X1", "X2", "Y"] };
        Assert.Equal(JsonSerializer.Serialize(question.Ask(Hawkins(), WorkContext.None), WireFormat.Json), JsonSerializer.Serialize(question.Ask(Hawkins(), WorkContext.None), WireFormat.Json));
    }

    private static double[] Draw(int n, uint task, ulong index)
    {
        var stream = new RandomStream(12, task, index);
        var x = new double[n];
        for (int i = 0; i < n; i++)
            x[i] = stream.NextNormal();
        return x;
    }

    /// <summary>60 vehicles of 6 runs each; the first four drag a brake and ran with soft tyres.</summary>
    private static RevisionContent Fleet(bool slips)
    {
        const int Vehicles = 60, Runs = 6, N = Vehicles * Runs;
        double[] size = Draw(Vehicles, 1, 0), own = Draw(Vehicles, 2, 0), e1 = Draw(N, 3, 0), e2 = Draw(N, 4, 0), e3 = Draw(N, 5, 0), e4 = Draw(N, 6, 0);
        double[] city = new double[N], highway = new double[N], mass = new double[N], pressure = new double[N];
        string[] vehicle = new string[N], brake = new string[N], route = new string[N];
        for (int i = 0; i < N; i++)
        {
            int v = i / Runs;
            bool drags = v < 4;
            mass[i] = 1500 + 200 * size[v] + 8 * e3[i];
            city[i] = Math.Round(8 + 1.1 * size[v] + 0.25 * own[v] + 0.12 * e1[i] + (drags ? 4 : 0), 2);
            highway[i] = Math.Round(6 + 0.7 * size[v] + 0.15 * own[v] + 0.1 * e2[i], 2);
            pressure[i] = 230 + 6 * e4[i] - (drags ? 55 : 0);
            vehicle[i] = $"V{v:00}";
            brake[i] = drags ? "dragging" : "free";
            route[i] = i % 3 == 0 ? "ring" : "hill";
        }
        if (slips)
        {
            // records 3 and 8 belong to otherwise ordinary places: undo the drag, then slip
            city[2] = Math.Round((city[2] - 4) * 10, 1);
            city[7] -= 4;
            mass[7] = Math.Round(mass[7] / 0.45359237);
        }
        return RevisionContent.InMemory(
        [
            Texts("Vehicle", ColumnRole.Vehicle, vehicle), Number("City", city, "L/100km"), Number("Highway", highway, "L/100km"), Number("Mass", mass, "kg"),
            new NumberColumn(new ColumnDefinition("Tyre pressure", ColumnKind.Number) { Unit = "kPa" }, pressure),
            Texts("Brake", ColumnRole.Attribute, brake), Texts("Route", ColumnRole.Attribute, route),
        ]);
    }

    private static RevisionContent TwoKinds()
    {
        double[] e1 = Draw(160, 8, 0), e2 = Draw(160, 9, 0), city = new double[160], highway = new double[160];
        var kind = new string[160];
        for (int i = 0; i < 160; i++)
        {
            bool hybrid = i >= 125;
            kind[i] = hybrid ? "hybrid" : "petrol";
            city[i] = (hybrid ? 3.5 : 9) + 0.3 * e1[i];
            highway[i] = 6 + 0.3 * e2[i] + 0.2 * e1[i];
        }
        city[0] += 3;
        return RevisionContent.InMemory([Number("City", city), Number("Highway", highway), Texts("Powertrain", ColumnRole.Attribute, kind)]);
    }
}
