using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;
using Gaugeyard.Records.Units;

namespace Gaugeyard.Exchange.Detection;

/// <summary>Guesses what each column is for from its name, unit and values. At most one column is the vehicle, the run name and the distance.</summary>
internal static class Roles
{
    public static void Guess(List<ColumnReading> readings, ColumnChoice?[] choices)
    {
        bool Free(int k) => choices[k]?.Role is null;
        bool Taken(ColumnRole role) => readings.Any(r => r.Column.Definition.Role == role);
        void Give(int k, ColumnRole role, string why)
        {
            var reading = readings[k];
            readings[k] = reading.With(reading.Column.Definition with { Role = role }) with { Evidence = reading.Evidence.TrimEnd('.') + "; " + why + "." };
        }
        for (int k = 0; k < readings.Count; k++)
            if (choices[k]?.Role is { } said)
                readings[k] = readings[k].With(readings[k].Column.Definition with { Role = said });

        var words = readings.Select(r => NameWords.Split(r.Column.Name)).ToList();
        ColumnKind Kind(int k) => readings[k].Column.Definition.Kind;
        bool Worded(int k) => Kind(k) is ColumnKind.Text or ColumnKind.Category;

        if (!Taken(ColumnRole.Vehicle))
        {
            // "vehicle_id" before "VIN": both name the vehicle, the first is the one people say
            int vehicle = Enumerable.Range(0, readings.Count).Where(k => Free(k) && Worded(k) && readings[k].Known > 0 && NameClues.Vehicle(words[k])).FirstOrDefault(-1);
            if (vehicle >= 0)
                Give(vehicle, ColumnRole.Vehicle, $"the name says vehicle, {((CodedColumn)readings[vehicle].Column).Levels.Length:N0} of them");
        }
        if (!Taken(ColumnRole.RunName))
        {
            int run = Enumerable.Range(0, readings.Count).Where(k => Free(k) && readings[k].Known > 0 && NameClues.Run(words[k]) && (Worded(k) || Kind(k) == ColumnKind.Number))
                .OrderByDescending(k => Worded(k) && readings[k].Unique == true).ThenByDescending(Worded).FirstOrDefault(-1);
            if (run >= 0 && (readings[run].Column is NumberColumn || ((CodedColumn)readings[run].Column).Levels.Length * 2 > readings[run].Known))
            {
                Give(run, ColumnRole.RunName, "the name says run");
                if (readings[run].Column is CodedColumn coded && readings[run].Known > coded.Levels.Length)
                    readings[run].Findings.Add(new Finding(Severity.Warning, readings[run].Column.Name, null, $"column {readings[run].Column.Name}: {readings[run].Known - coded.Levels.Length:N0} records repeat the name of an earlier one"));
            }
        }
        if (!Taken(ColumnRole.RunName))
        {
            int label = Enumerable.Range(0, readings.Count).Where(k => Free(k) && Worded(k) && readings[k].Column.Definition.Role == ColumnRole.Attribute && readings[k].Unique == true && readings[k].Known >= 10 && !NameClues.Note(words[k])
                && ((CodedColumn)readings[k].Column).Levels.All(l => l.Length <= 60)).FirstOrDefault(-1);
            if (label >= 0)
                Give(label, ColumnRole.RunName, "no two records share a value, so it can label them");
        }
        for (int k = 0; k < readings.Count; k++)
        {
            var definition = readings[k].Column.Definition;
            if (!Free(k) || definition.Role != ColumnRole.Attribute)
                continue;
            if (Kind(k) == ColumnKind.Number)
            {
                var unit = Unit.Find(definition.Unit);
                if (!Taken(ColumnRole.Distance) && NameClues.Distance(words[k]) && (unit?.Family == UnitFamily.Distance || definition.Unit is null && words[k].Contains("distance")))
                    Give(k, ColumnRole.Distance, "the name says distance");
                else if (unit?.Family is UnitFamily.Consumption or UnitFamily.Economy || definition.Unit == "mpg" || NameClues.Reading(words[k]) || definition.Unit is null && NameClues.CityOrHighway(words[k]))
                    Give(k, ColumnRole.Reading, "name or unit says consumption or economy");
            }
            else if (Kind(k) == ColumnKind.Text && (NameClues.Note(words[k]) || readings[k].Unique != true && readings[k].Known > 0 && ((CodedColumn)readings[k].Column).Levels.Average(l => l.Length) > 25))
                Give(k, ColumnRole.Note, "free text");
            else if (Worded(k) && NameClues.Note(words[k]))
                Give(k, ColumnRole.Note, "the name says remarks");
        }
    }
}
