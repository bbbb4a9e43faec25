using Gaugeyard.Analysis.Sampling;
using Gaugeyard.Records.Columns;
using Gaugeyard.Records.RunSets;

namespace Gaugeyard.Analysis.Pairs;

/// <summary>The points of a scatter matrix: readings, colour and record numbers as arrays. Asked over HTTP in binary form.</summary>
public sealed record PointsQuestion : Question
{
    /// <summary>Most readings of one matrix.</summary>
    public const int MostReadings = 8;

    /// <summary>Most levels of a colour that fit its code.</summary>
    public const int MostLevels = 65_534;

    /// <summary>One to eight number columns.</summary>
    public IReadOnlyList<string> Readings { get; init; } = [];

    /// <summary>The column that colours the points, or null.</summary>
    public string? Colour { get; init; }

    /// <summary>Collects the points. Records that miss a reading stay: they are shown in the margin of its panels.</summary>
    /// <exception cref="QuestionException">A column does not exist or does not fit.</exception>
    public PointColumns Collect(RevisionContent content)
    {
        if (Readings.Count is < 1 or > MostReadings)
            throw new QuestionException($"Name between 1 and {MostReadings} readings; {Readings.Count} were named.");
        var sample = Sample.Of(content, this);
        double[][] values = [.. Readings.Select(sample.Number)];
        byte[]? filled = WithFilled ? Filled(sample, values) : null;
        ushort[]? colours = null;
        string[] levels = [];
        if (Colour is not null)
        {
            var (codes, names) = sample.Category(Colour);
            if (names.Length > MostLevels)
                throw new QuestionException($"'{Colour}' has {names.Length} values, too many to colour by. Choose a category.");
            levels = names;
            colours = Array.ConvertAll(codes, c => c < 0 ? ushort.MaxValue : (ushort)c);
        }
        var numbers = new int[sample.Count];
        for (int i = 0; i < numbers.Length; i++)
            numbers[i] = sample.RecordAt(i);
        return new PointColumns(Readings, [.. Readings.Select(r => content.Find(r)!.Unit)], values, filled, Colour, levels, colours, numbers);
    }

    /// <summary>Bit j is set where reading j of a record is an estimate; null when none is.</summary>
    private byte[]? Filled(Sample sample, double[][] values)
    {
        byte[]? filled = null;
        for (int j = 0; j < Readings.Count; j++)
        {
            var marks = sample.Content.MarksOf(Readings[j]);
            if (marks.Count == 0)
                continue;
            for (int i = 0; i < sample.Count; i++)
                if (!double.IsNaN(values[j][i]) && marks.TryGetValue(sample.RecordAt(i), out var mark) && mark.State == CellState.Filled)
                    (filled ??= new byte[sample.Count])[i] |= (byte)(1 << j);
        }
        return filled;
    }
}

/// <summary>Columns of points; row i of every array is the same record.</summary>
/// <param name="Readings">Names.</param>
/// <param name="Units">Unit codes.</param>
/// <param name="Values">Per reading; NaN where missing.</param>
/// <param name="Filled">Bit j set where reading j is an estimate; null when none is.</param>
/// <param name="Levels">Levels of the colour.</param>
/// <param name="Colours">Level of each record, 65535 where missing; null without a colour.</param>
/// <param name="Records">Record numbers, rising.</param>
public sealed record PointColumns(
    IReadOnlyList<string> Readings, IReadOnlyList<string?> Units, double[][] Values, byte[]? Filled, string? Colour, string[] Levels, ushort[]? Colours, int[] Records);
