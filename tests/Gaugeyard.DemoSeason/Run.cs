namespace Gaugeyard.DemoSeason;

/// <summary>One run as it really was, and which of its cells were lost.</summary>
internal sealed class Run
{
    public string Name { get; set; } = "";

    public required DateTime Start { get; init; }

    public required Vehicle Vehicle { get; init; }

    public required string LoadState { get; init; }

    public required string Driver { get; init; }

    public required string Route { get; init; }

    public required bool Wet { get; init; }

    public required double Mass { get; init; }

    public required double Ambient { get; init; }

    public required double Pressure { get; init; }

    public required double Distance { get; init; }

    public required double Fuel { get; init; }

    public required double City { get; init; }

    public required double Highway { get; init; }

    public int Odometer { get; set; }

    public string Remarks { get; set; } = "";

    /// <summary>Columns that hold nothing on this run.</summary>
    public HashSet<string> Lost { get; } = [];

    /// <summary>Columns that somebody wrote wrongly: the number that stands in the files.</summary>
    public Dictionary<string, double> Miswritten { get; } = [];
}
