using System.Text;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Xunit;

namespace Gaugeyard.Exchange.Tests.Detection;

/// <summary>What people's files do, item by item.</summary>
public class MessTests
{
    private const string Season = """
        Ottermoor proving ground;;;;;;;
        Season 4, exported 12.05.2031;;;;;;;

        Run;Vehicle;Load;Test mass;Tyre pressure;City;Wet;Remarks
        ;;;kg;kPa;L/100 km;;
        OM-0001;Brindle 07;empty;1.540;230;8,31;no;
        OM-0002;Brindle 07;half;1.690;2,4?;8,60*;no;hail, run cut short
        OM-0003;Corran 2;full;2.410;9999;12,6;yes;
        OM-0004;Corran 2;n/a;2.405;225;-;yes;second driver
        OM-0005;Corran 2;half;2.400;228;<0,1;no;
        OM-0006;Dunlin 11;empty;1.498;231;#DIV/0!;no;
        OM-0007;Dunlin 11;empty;1.502;229;7,95;no;
        OM-0008;Dunlin 11;full;1.777;9999;9,02;yes;
        Mean;;;1.903;;9,2;;
        """;

    [Fact]
    public void ASeasonSheetIsReadWithoutOverruling()
    {
        var table = Scratch.Read(Season, name: "season.csv");
        Assert.Equal(8, table.Records);
        Assert.Equal([4], table.Reading.HeaderRows);
        Assert.Equal(5, table.Reading.UnitRow);
        Assert.Equal(',', table.Reading.DecimalMark);
        Assert.Equal(["Run", "Vehicle", "Load", "Test mass", "Tyre pressure", "City", "Wet", "Remarks"], table.Columns.Select(c => c.Name));
        Assert.Equal([1540, 1690, 2410, 2405, 2400, 1498, 1502, 1777], table.Numbers("Test mass"));
        Assert.Equal([230, double.NaN, double.NaN, 225, 228, 231, 229, double.NaN], table.Numbers("Tyre pressure"));
        Assert.Equal([8.31, 8.6, 12.6, double.NaN, double.NaN, double.NaN, 7.95, 9.02], table.Numbers("City"));
        Assert.Equal(ColumnKind.YesNo, table.Kind("Wet"));
        Assert.Equal(["empty", "half", "full"], table.Column("Load").Definition.Levels!);
        Assert.Null(table.Texts("Load")[3]);
        Assert.Equal(("kg", "kPa", "L/100km"), (table.Column("Test mass").Definition.Unit, table.Column("Tyre pressure").Definition.Unit, table.Column("City").Definition.Unit));
        Assert.Equal([ColumnRole.RunName, ColumnRole.Vehicle, ColumnRole.Attribute, ColumnRole.Attribute, ColumnRole.Attribute, ColumnRole.Reading, ColumnRole.Attribute, ColumnRole.Note], table.Columns.Select(c => c.Definition.Role));

        Assert.Contains(table.Findings, f => f is { Column: "Tyre pressure", Record: 2, Text: "row 7, column Tyre pressure: '2,4?' is not a number; kept as text, treated as missing" });
        Assert.Equal("2,4?", table.Marks["Tyre pressure"][2].Original);
        Assert.Equal(CellState.Missing, table.Marks["Tyre pressure"][2].State);
        Assert.Equal(("8,60*", CellState.Measured), (table.Marks["City"][2].Original, table.Marks["City"][2].State));
        Assert.Equal(("<0,1", CellState.Missing), (table.Marks["City"][5].Original, table.Marks["City"][5].State));
        Assert.Contains(table.Findings, f => f.Column == "Tyre pressure" && f.Text.Contains("9999 in 2 cells (first in row 8)", StringComparison.Ordinal));
        Assert.Contains("9999", table.Column("Tyre pressure").Definition.MissingCodes);
        Assert.Equal(["above the names", "above the names", "a row of totals at the end"], table.Reading.LeftOut.Select(r => r.Why));
        Assert.Equal(14, table.Reading.LeftOut[2].Row);
    }

    [Fact]
    public void ZeroIsNeverMissing()
    {
        var table = Scratch.Read("run,distance\na,100\nb,0\nc,120\nd,0\n");
        Assert.Equal([100, 0, 120, 0], table.Numbers("distance"));
    }

    [Fact]
    public void ACodeInsideTheRangeOfTheOthersStaysANumber()
    {
        var table = Scratch.Read("run,odometer_km\n" + string.Concat(Enumerable.Range(0, 40).Select(i => $"r{i},{(i % 8 == 3 ? 9999 : 800 + 1500 * i)}\n")));
        Assert.Equal(5, table.Numbers("odometer_km").Count(v => v == 9999));
    }

    [Fact]
    public void NegativeCodesFarBelowAreMissing()
    {
        var table = Scratch.Read("run,ambient_c\n" + string.Concat(Enumerable.Range(0, 40).Select(i => $"r{i},{(i % 10 == 3 ? -999 : -4.5 + i)}\n")));
        Assert.Equal(4, table.Numbers("ambient_c").Count(double.IsNaN));
        Assert.Equal(["-999"], table.Column("ambient_c").Definition.MissingCodes);
    }

    [Theory]
    [InlineData("driver code", "7,7,12,3")]
    [InlineData("route", "1,2,3,1")]
    [InlineData("vehicle_id", "1001,1001,1002,1003")]
    [InlineData("axle code", "1,2,1,2")]
    [InlineData("batch", "007,012,007,003")]
    [InlineData("VIN", "1,2,2,1")]
    public void NumbersThatAreNamesStayCategories(string name, string values)
    {
        string[] cells = values.Split(',');
        var table = Scratch.Read($"run,{name}\n" + string.Concat(cells.Select((v, i) => $"R{i},{v}\n")));
        Assert.Equal(ColumnKind.Category, table.Kind(name));
        Assert.Equal(cells, table.Texts(name));
    }

    [Theory]
    [InlineData("cylinders", "4,6,8,4")]
    [InlineData("gears", "5,6,5,7")]
    [InlineData("model year", "2029,2030,2031,2030")]
    [InlineData("passengers", "4,5,2,4")]
    [InlineData("am", "0,1,1,0")]
    public void WhenInDoubtWholeNumbersStayNumbers(string name, string values)
    {
        var table = Scratch.Read($"run,{name}\n" + string.Concat(values.Split(',').Select((v, i) => $"R{i},{v}\n")));
        Assert.Equal(ColumnKind.Number, table.Kind(name));
    }

    [Fact]
    public void WordsAmongFewWholeNumbersMakeACategory()
    {
        var table = Scratch.Read("run,cylinders\n" + string.Concat(Enumerable.Range(0, 60).Select(i => $"R{i},{(i == 31 ? "rotary" : i % 2 == 0 ? "4" : "6")}\n")));
        Assert.Equal(ColumnKind.Category, table.Kind("cylinders"));
        Assert.Equal("rotary", table.Texts("cylinders")[31]);
    }

    [Fact]
    public void TextThatNumbersWouldNotGiveBackIsReadAgain()
    {
        var table = Scratch.Read("run,build\nR1,1.50\nR2,1.5\nR3,1.10\nR4,2.0\n", new ReadChoices { Columns = [new("build") { Kind = ColumnKind.Category }] });
        Assert.Equal(["1.50", "1.5", "1.10", "2.0"], table.Texts("build"));
        var detected = Scratch.Read("run,route\nR1,1\nR2,1e1\nR3,x2\nR4,x2\n");
        Assert.Equal(["1", "1e1", "x2", "x2"], detected.Texts("route"));
    }

    [Theory]
    [InlineData("1,540;2,410.5", '.', new[] { 1540, 2410.5 })]
    [InlineData("1.540;2.410,5", ',', new[] { 1540, 2410.5 })]
    [InlineData("1 540;2\u00a0410.5", '.', new[] { 1540, 2410.5 })]
    [InlineData("1'540;2'410.5", '.', new[] { 1540, 2410.5 })]
    [InlineData("1,234,567;12", '.', new[] { 1234567.0, 12 })]
    [InlineData("1.234.567;12", ',', new[] { 1234567.0, 12 })]
    [InlineData("7,4;8,25", ',', new[] { 7.4, 8.25 })]
    [InlineData("\u22124.5;+3.0", '.', new[] { -4.5, 3 })]
    [InlineData("1.5e3;2E-2", '.', new[] { 1500, 0.02 })]
    [InlineData("0.001;0.125", '.', new[] { 0.001, 0.125 })]
    public void MarksBetweenThousandsAndDecimals(string cells, char mark, double[] expected)
    {
        var table = Scratch.Read("run;mass\n" + string.Concat(cells.Split(';').Select((v, i) => $"R{i};{v}\n")));
        Assert.Equal(expected, table.Numbers("mass"));
        Assert.Contains(mark == ',' && cells.Contains(',', StringComparison.Ordinal) ? "decimal comma" : "numbers", table.Preview("mass").Evidence, StringComparison.Ordinal);
    }

    [Fact]
    public void NumbersKeepEveryBit()
    {
        var random = new Random(20310407);
        double[] values = [.. Enumerable.Range(0, 3000).Select(_ => BitConverter.Int64BitsToDouble(random.NextInt64())).Where(double.IsFinite), -0.0, 0.1, 1e308, 5e-324, 123456789012345678, 0.30000000000000004];
        var table = Scratch.Read("n,x\n" + string.Concat(values.Select(v => $"a,{v:R}\n")));
        Assert.Equal(values.Select(BitConverter.DoubleToInt64Bits), table.Numbers("x").Select(BitConverter.DoubleToInt64Bits));
    }

    [Fact]
    public void InfinitiesAreMissingWithAFinding()
    {
        var table = Scratch.Read("run,x\nR1,1.5\nR2,inf\nR3,-Infinity\nR4,1e999\nR5,2.5\nR6,3\nR7,4\nR8,5\nR9,6\n");
        Assert.Equal([1.5, double.NaN, double.NaN, double.NaN, 2.5, 3, 4, 5, 6], table.Numbers("x"));
        Assert.Equal(3, table.Findings.Count(f => f.Column == "x" && f.Text.Contains("not a finite number", StringComparison.Ordinal)));
        Assert.Equal("1e999", table.Marks["x"][4].Original);
    }

    [Theory]
    [InlineData("City [L/100 km]", "L/100km")]
    [InlineData("mass (kg)", "kg")]
    [InlineData("tyre_kPa", "kPa")]
    [InlineData("l_per_100km", "L/100km")]
    [InlineData("co2_g_km", "g/km")]
    [InlineData("speed_kmh", "km/h")]
    [InlineData("temp_c", "°C")]
    [InlineData("Ambient (°C)", "°C")]
    [InlineData("displacement_l", "L")]
    [InlineData("power, kW", "kW")]
    [InlineData("Consumption in kWh/100 km", "kWh/100km")]
    [InlineData("mpg (US)", "mi/gal-us")]
    [InlineData("mpg_uk", "mi/gal-imp")]
    [InlineData("Frontal area (m²)", "m²")]
    [InlineData("kWh/100 km", "kWh/100km")]
    [InlineData("Strecke km", "km")]
    [InlineData("Tow bar", null)]
    [InlineData("Passengers in", null)]
    [InlineData("Tyre pressure (cold)", null)]
    [InlineData("model", null)]
    [InlineData("disp", null)]
    [InlineData("grade_a", null)]
    public void UnitsInHeadings(string name, string? unit)
    {
        var table = Scratch.Read($"run;{name}\nR1;7\nR2;8\n");
        Assert.Equal(unit, table.Column(name).Definition.Unit);
    }

    [Fact]
    public void UnitsAfterNumbersAreBroughtToOneUnit()
    {
        var table = Scratch.Read("run;pressure\nR1;230 kPa\nR2;2.3 bar\nR3;231 kPa\nR4;33 psi\n");
        Assert.Equal("kPa", table.Column("pressure").Definition.Unit);
        var x = table.Numbers("pressure");
        Assert.Equal(230, x[0]);
        Assert.Equal(230, x[1], 1e-9);
        Assert.Equal(33 * 6.894757293168361, x[3], 1e-9);
        Assert.Equal("2.3 bar", table.Marks["pressure"][2].Original);
    }

    [Fact]
    public void WhichGallonIsAskedUnlessAConsumptionColumnSettlesIt()
    {
        var open = Scratch.Read("run,mpg\nR1,30\nR2,25\n");
        Assert.Equal("mpg", open.Column("mpg").Definition.Unit);
        var doubt = Assert.Single(open.Reading.Doubts);
        Assert.Equal(DoubtAbout.Gallon, doubt.About);
        var chosen = Scratch.Read("run,mpg\nR1,30\nR2,25\n", ReadChoices.Detected.Settle(doubt, "mi/gal-imp"));
        Assert.Equal("mi/gal-imp", chosen.Column("mpg").Definition.Unit);
        Assert.Empty(chosen.Reading.Doubts);

        string us = "run,mpg,l_per_100km\n" + string.Concat(Enumerable.Range(20, 12).Select(m => $"R{m},{m},{235.214583 / m:0.00}\n"));
        Assert.Equal("mi/gal-us", Scratch.Read(us).Column("mpg").Definition.Unit);
        string imperial = "run,mpg,l_per_100km\n" + string.Concat(Enumerable.Range(20, 12).Select(m => $"R{m},{m},{282.480936 / m:0.00}\n"));
        Assert.Equal("mi/gal-imp", Scratch.Read(imperial).Column("mpg").Definition.Unit);
    }

    [Theory]
    [InlineData("2031-04-07,2031-12-31", "2031-04-07,2031-12-31")]
    [InlineData("07.04.2031,05.06.2031", "2031-04-07,2031-06-05")]
    [InlineData("13/04/2031,05/06/2031", "2031-04-13,2031-06-05")]
    [InlineData("04/13/2031,05/06/2031", "2031-04-13,2031-05-06")]
    [InlineData("7 Apr 2031,31-Dec-2030", "2031-04-07,2030-12-31")]
    [InlineData("Apr 7 2031,December 31 2030", "2031-04-07,2030-12-31")]
    [InlineData("2031-04-07 08:10,2031-04-07T08:10:30.25", "2031-04-07T08:10:00,2031-04-07T08:10:30.2500000")]
    [InlineData("4/13/31 8:10 PM,4/14/31 12:05 AM", "2031-04-13T20:10:00,2031-04-14T00:05:00")]
    [InlineData("1871-05-01,1899-12-31", "1871-05-01,1899-12-31")]
    [InlineData("20310407,20310408", "2031-04-07,2031-04-08")]
    [InlineData("47945,47946.5", "2031-04-07,2031-04-08T12:00:00")]
    public void Dates(string cells, string expected)
    {
        var table = Scratch.Read("run;date\n" + string.Concat(cells.Split(',').Select((v, i) => $"R{i};{v}\n")));
        Assert.Equal(ColumnKind.DateTime, table.Kind("date"));
        Assert.Equal(expected.Split(','), table.Texts("date"));
        Assert.Empty(table.Reading.Doubts);
    }

    [Fact]
    public void AmbiguousDatesAreAskedAndBothAnswersHold()
    {
        string text = "run,date\nR1,03/04/2031\nR2,05/06/2031\n";
        var table = Scratch.Read(text);
        var doubt = Assert.Single(table.Reading.Doubts);
        Assert.Equal((DoubtAbout.DateOrder, "date"), (doubt.About, doubt.Column));
        Assert.Contains(table.Findings, f => f.Severity == Severity.Warning && f.Column == "date");
        var day = Scratch.Read(text, ReadChoices.Detected.Settle(doubt, "day first"));
        Assert.Equal(["2031-04-03", "2031-06-05"], day.Texts("date"));
        Assert.Empty(day.Reading.Doubts);
        var month = Scratch.Read(text, ReadChoices.Detected.Settle(doubt, "month first"));
        Assert.Equal(["2031-03-04", "2031-05-06"], month.Texts("date"));
    }

    [Theory]
    [InlineData("yes,no,yes")]
    [InlineData("Y,N,Y")]
    [InlineData("TRUE,FALSE,TRUE")]
    [InlineData("ja,nein,ja")]
    [InlineData("on,off,on")]
    public void YesAndNo(string cells)
    {
        var table = Scratch.Read("run,wet\n" + string.Concat(cells.Split(',').Select((v, i) => $"R{i},{v}\n")));
        Assert.Equal(["yes", "no", "yes"], table.Texts("wet"));
    }

    [Theory]
    [InlineData("hot,cold,warm,cold", "cold,warm,hot")]
    [InlineData("Wet,dry,Damp,dry", "dry,Damp,Wet")]
    [InlineData("high,low,medium,low", "low,medium,high")]
    public void KnownLaddersAreOrdered(string cells, string order)
    {
        var table = Scratch.Read("run,state\n" + string.Concat(cells.Split(',').Select((v, i) => $"R{i},{v}\n")));
        Assert.Equal(order.Split(','), table.Column("state").Definition.Levels!);
    }

    [Fact]
    public void SpellingVariantsAreReportedAndBlanksTrimmed()
    {
        var table = Scratch.Read("run,route name\nR1,Heron\nR2, Heron \nR3,heron\nR4,Otter\n");
        Assert.Equal(["Heron", "Heron", "heron", "Otter"], table.Texts("route name"));
        Assert.Contains(table.Findings, f => f.Record == 3 && f.Text.Contains("'Heron' (2) and 'heron' (1)", StringComparison.Ordinal));
    }

    [Fact]
    public void TwoHeaderRowsAreJoined()
    {
        var table = Scratch.Read("Run,Vehicle,Consumption,,Remarks\n,,City,Highway,\nR1,V1,8.1,6.2,\nR2,V1,8.4,6.1,hail\n");
        Assert.Equal([1, 2], table.Reading.HeaderRows);
        Assert.Equal(["Run", "Vehicle", "Consumption City", "Consumption Highway", "Remarks"], table.Columns.Select(c => c.Name));
        Assert.Equal(2, table.Records);
    }

    [Fact]
    public void RepeatedHeadersAreLeftOut()
    {
        var table = Scratch.Read("run,city\nR1,8.1\nrun,city\nR2,8.4\n");
        Assert.Equal(["R1", "R2"], table.Texts("run"));
        Assert.Equal([3], table.Reading.LeftOut.Select(r => r.Row));
        var named = Scratch.Read("run,city\nR1,8.1\nrun,city\nR2,8.4x\nR3,8.2\nR4,8.3\nR5,8.1\nR6,8.0\nR7,7.9\n");
        Assert.Contains(named.Findings, f => f is { Record: 2 } && f.Text.StartsWith("row 4, column city", StringComparison.Ordinal));
    }

    [Fact]
    public void NamesAreMadeDistinctWithAFinding()
    {
        var table = Scratch.Read("run,city,city,\nR1,8.1,8.2,a\nR2,8.4,8.5,b\n");
        Assert.Equal(["run", "city", "city 2", "Column 4"], table.Columns.Select(c => c.Name));
        Assert.Equal(2, table.Findings.Count(f => f.Severity == Severity.Warning && f.Column is "city 2" or "Column 4"));
    }

    [Fact]
    public void RaggedRowsLoseNothing()
    {
        var table = Scratch.Read("run,city\nR1,8.1\nR2\nR3,8.2,extra,7\nR4,8.3\n");
        Assert.Equal(4, table.Records);
        Assert.Equal([8.1, double.NaN, 8.2, 8.3], table.Numbers("city"));
        Assert.Equal([null, null, "extra", null], table.Texts("Column 3"));
        Assert.Contains(table.Findings, f => f.Text.StartsWith("row 4 has more cells", StringComparison.Ordinal));
        Assert.Contains(table.Findings, f => f.Text.StartsWith("row 3 has fewer cells", StringComparison.Ordinal));
    }

    [Fact]
    public void RowsOfSeparatorsAreLeftOutWithANote()
    {
        var table = Scratch.Read("run,city\nR1,8.1\n,\n\nR2,8.2\n , \n,\n");
        Assert.Equal(2, table.Records);
        Assert.Contains(table.Findings, f => f.Text == "row 3 has separators but no value, like 2 more rows; left out");
    }

    [Fact]
    public void TimeZonesAreToldAndTheClockTimeKept()
    {
        var table = Scratch.Read("run,start\nR1,2031-04-07T08:10:00+02:00\nR2,2031-04-07T09:10:00Z\nR3,2031-04-07T10:10:00\n");
        Assert.Equal(["2031-04-07T08:10:00", "2031-04-07T09:10:00", "2031-04-07T10:10:00"], table.Texts("start"));
        Assert.Contains(table.Findings, f => f.Column == "start" && f.Text.Contains("2 values carry a time zone", StringComparison.Ordinal));
    }

    [Fact]
    public void NoHeaderIsNoticed()
    {
        var table = Scratch.Read("1.5,2.5\n3,4\n5,6\n");
        Assert.Equal(3, table.Records);
        Assert.Equal(["Column 1", "Column 2"], table.Columns.Select(c => c.Name));
        Assert.Contains(table.Findings, f => f.Text.Contains("no row of column names", StringComparison.Ordinal));
    }

    [Fact]
    public void ASparseFirstRecordIsARecord()
    {
        var table = Scratch.Read("age,bmi,hyp,chl\n1,,,\n2,22.7,1,187\n1,,1,187\n3,,,\n1,20.4,1,113\n");
        Assert.Equal(5, table.Records);
        Assert.Equal([1, 2, 1, 3, 1], table.Numbers("age"));
    }

    [Fact]
    public void LateSurprisesInALongFileStillDecide()
    {
        // the first 2 MB are numbers; the rest shows that the column holds codes and the file is Windows-1252
        var text = new StringBuilder("run,code x,note\n");
        for (int i = 0; i < 150_000; i++)
            text.Append('R').Append(i).Append(',').Append(i < 60_000 ? "1.50" : "B" + i % 7).Append(',').Append(i == 149_999 ? "Stra\u00dfe" : "dry").Append('\n');
        var table = Scratch.Read(Encoding.Latin1.GetBytes(text.ToString()));
        Assert.Equal(150_000, table.Records);
        Assert.Equal(ColumnKind.Category, table.Kind("code x"));
        Assert.Equal("1.50", table.Texts("code x")[0]);
        Assert.Equal("Stra\u00dfe", table.Texts("note")[^1]);
        Assert.Equal("windows-1252", table.Reading.Encoding);
    }

    [Fact]
    public void ChoicesOverruleDetection()
    {
        string text = "run;code;city;date\nR1;4;1.540;03/04/2031\nR2;6;2.410;05/06/2031\nR3;x;7.5;NA\n";
        var table = Scratch.Read(text, new ReadChoices
        {
            DecimalMark = '.',
            DateOrder = DateOrder.MonthFirst,
            Columns = [new("code") { Kind = ColumnKind.Category, MissingCodes = ["x"] }, new("city") { Unit = "l/100 km", Role = ColumnRole.Reading }, new("nothing") { Kind = ColumnKind.Text }],
        });
        Assert.Equal(["4", "6", null], table.Texts("code"));
        Assert.Equal([1.54, 2.41, 7.5], table.Numbers("city"));
        Assert.Equal("L/100km", table.Column("city").Definition.Unit);
        Assert.Equal(["2031-03-04", "2031-05-06", null], table.Texts("date"));
        Assert.Contains(table.Findings, f => f.Text.Contains("'nothing'", StringComparison.Ordinal));
        var ordered = Scratch.Read("run;size\nR1;big\nR2;tiny\n", new ReadChoices { Columns = [new("size") { Kind = ColumnKind.OrderedCategory, Levels = ["tiny", "big", "huge"] }] });
        Assert.Equal(["tiny", "big", "huge"], ordered.Column("size").Definition.Levels!);
        Assert.Equal([1, 0], Assert.IsType<CodedColumn>(ordered.Column("size")).Codes);
        var rows = Scratch.Read("a;b\nrun;city\nR1;8\nR2;9\n", new ReadChoices { HeaderRows = [2] });
        Assert.Equal(["run", "city"], rows.Columns.Select(c => c.Name));
    }

    [Fact]
    public void ReadingWithTheDetectedChoicesGivesTheSame()
    {
        var once = Scratch.Read(Season);
        var again = Scratch.Read(Season, once.ReadAs);
        Assert.Equal(once.Columns.Select(c => c.Definition.Name), again.Columns.Select(c => c.Definition.Name));
        Assert.Equal(once.Numbers("Test mass"), again.Numbers("Test mass"));
    }
}
