using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;

namespace Gaugeyard.Exchange.Detection;

/// <summary>
/// Settles which gallon an "mpg" column means where a consumption column of the same readings stands beside it: their product
/// is 235.215 for US and 282.481 for imperial gallons. Without one the question is asked.
/// </summary>
internal static class Gallons
{
    public static void Settle(List<ColumnReading> readings, List<Doubt> doubts, List<Finding> findings)
    {
        for (int k = 0; k < readings.Count; k++)
        {
            if (readings[k].Column is not NumberColumn economy || economy.Definition.Unit != "mpg")
                continue;
            string name = economy.Name;
            var partner = readings.Select(r => r.Column).OfType<NumberColumn>()
                .Where(c => Unit.Find(c.Definition.Unit)?.BaseCode == "L/100km" && Unit.Find(c.Definition.Unit)!.Family == UnitFamily.Consumption)
                .Select(c => (Column: c, Verdict: Compare(economy.Values, c)))
                .OrderByDescending(c => c.Verdict.Share).FirstOrDefault();
            if (partner.Column is not null && partner.Verdict.Share > 0.5)
            {
                string code = partner.Verdict.Imperial ? "mi/gal-imp" : "mi/gal-us";
                string says = $"its product with {partner.Column.Name} is that of {(partner.Verdict.Imperial ? "imperial" : "US")} gallons in {partner.Verdict.Share:P0} of the records";
                readings[k] = readings[k].With(economy.Definition with { Unit = code }) with { Evidence = readings[k].Evidence.TrimEnd('.') + "; " + says + "." };
                findings.Add(new Finding(Severity.Note, name, null, $"column {name} is in mpg; {says}"));
                continue;
            }
            doubts.Add(new Doubt(DoubtAbout.Gallon, name, $"{name} is in mpg. Which gallon, US (3.785 L) or imperial (4.546 L)?",
                [new("mi/gal-us", "US gallon"), new("mi/gal-imp", "imperial gallon")], null));
            findings.Add(new Finding(Severity.Warning, name, null, $"column {name} is in mpg, and the file does not say which gallon; choose the unit to compare it with consumption"));
        }
    }

    private static (bool Imperial, double Share) Compare(double[] economy, NumberColumn consumption)
    {
        double us = Unit.Find("mi/gal-us")!.ToBase, imperial = Unit.Find("mi/gal-imp")!.ToBase;
        var unit = Unit.Find(consumption.Definition.Unit)!;
        int both = 0, likeUs = 0, likeImperial = 0;
        for (int row = 0; row < economy.Length; row++)
        {
            double product = economy[row] * unit.ToBaseValue(consumption.Values[row]);
            if (double.IsNaN(product))
                continue;
            both++;
            likeUs += Math.Abs(product / us - 1) < 0.01 ? 1 : 0;
            likeImperial += Math.Abs(product / imperial - 1) < 0.01 ? 1 : 0;
        }
        return (likeImperial > likeUs, both == 0 ? 0 : (double)Math.Max(likeUs, likeImperial) / both);
    }
}
