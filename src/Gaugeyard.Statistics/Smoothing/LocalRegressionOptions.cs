namespace Gaugeyard.Statistics.Smoothing;

/// <summary>Settings of a local regression.</summary>
public sealed record LocalRegressionOptions
{
    /// <summary>Degree of the local polynomial: 0, 1 or 2.</summary>
    public int Degree { get; init; } = 2;

    /// <summary>Share of the records in each neighbourhood, above 0; above 1 stretches the bandwidth by span^(1/p).</summary>
    public double Span { get; init; } = 0.75;

    /// <summary>Whether records far off are weighed down: one fit and three re-weighted ones with bisquare weights at 6 times the median absolute residual.</summary>
    public bool Robust { get; init; }
}
