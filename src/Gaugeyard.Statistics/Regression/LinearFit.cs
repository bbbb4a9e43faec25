using Gaugeyard.Statistics.Describing;
using Gaugeyard.Statistics.Numerics;

namespace Gaugeyard.Statistics.Regression;

/// <summary>One coefficient with its errors; NaN where not defined.</summary>
/// <param name="VehicleDf">Satterthwaite degrees of freedom of the vehicle-aware error; NaN without vehicles.</param>
public sealed record Coefficient(double Estimate, double StandardError, double Hc3, double Vehicle, double VehicleDf);

/// <summary>Least-squares fit of a linear model with intercept. Read Reason first: it says why there is no fit.</summary>
public sealed class LinearFit
{
    private readonly double[] _means, _scales;
    private readonly HouseholderQr _qr;
    private readonly double[][] _q;

    private LinearFit(string reason)
    {
        Reason = reason;
        (_means, _scales, _qr, _q) = ([], [], new HouseholderQr([], 0), []);
        (Kept, Beta, Residuals, Leverage) = ([], [], [], []);
    }

    private LinearFit(int[] kept, double[] means, double[] scales, HouseholderQr qr, double[][] q, double intercept, double[] beta, double[] residuals, double[] y)
    {
        (Kept, _means, _scales, _qr, _q, Intercept, Beta, Residuals) = (kept, means, scales, qr, q, intercept, beta, residuals);
        Count = y.Length;
        Leverage = new double[Count];
        Array.Fill(Leverage, 1.0 / Count);
        foreach (double[] column in q)
            for (int i = 0; i < Count; i++)
                Leverage[i] += column[i] * column[i];
        Rss = SumOfSquares(residuals);
        Tss = Moments.Of(y).M2;
    }

    /// <summary>Why there is no fit; null when there is one.</summary>
    public string? Reason { get; }

    /// <summary>Columns of the design that are in the fit; the others are combinations of these.</summary>
    public int[] Kept { get; }

    public double Intercept { get; }

    /// <summary>Slope per kept column.</summary>
    public double[] Beta { get; }

    /// <summary>Measured minus fitted, per record.</summary>
    public double[] Residuals { get; }

    /// <summary>Diagonal of the hat matrix.</summary>
    public double[] Leverage { get; }

    public int Count { get; }

    /// <summary>Number of coefficients with the intercept.</summary>
    public int Parameters => Beta.Length + 1;

    public int Df => Count - Parameters;

    public double Rss { get; }

    public double Tss { get; }

    /// <summary>Residual standard deviation.</summary>
    public double S => Df > 0 ? Math.Sqrt(Rss / Df) : double.NaN;

    public double R2 => Tss > 0 ? 1 - Rss / Tss : double.NaN;

    public double AdjustedR2 => Df > 0 && Tss > 0 ? 1 - Rss / Df / (Tss / (Count - 1)) : double.NaN;

    /// <summary>Sum of squared deleted residuals.</summary>
    public double Press => Residuals.Select((r, i) => r / (1 - Leverage[i])).Sum(d => d * d);

    /// <summary>1 - PRESS / total sum of squares: how well unseen records would be met.</summary>
    public double PressR2 => Tss > 0 ? 1 - Press / Tss : double.NaN;

    /// <summary>n ln(2 pi RSS / n) + n + 2 (k + 1), k coefficients with the intercept (Akaike 1974).</summary>
    public double Aic => Deviance + 2 * (Parameters + 1);

    /// <summary>AIC with the small-sample term (Hurvich and Tsai 1989, Biometrika 76:297-307).</summary>
    public double Aicc
    {
        get
        {
            double k = Parameters + 1, rest = Count - k - 1;
            return rest > 0 ? Aic + 2 * k * (k + 1) / rest : double.NaN;
        }
    }

    /// <summary>Schwarz (1978, Annals of Statistics 6:461-464).</summary>
    public double Bic => Deviance + Math.Log(Count) * (Parameters + 1);

    private double Deviance => Count * Math.Log(2 * Math.PI * Rss / Count) + Count;

    /// <summary>F of the model against the mean alone.</summary>
    public double F => Parameters > 1 && Df > 0 ? (Tss - Rss) / (Parameters - 1) / (Rss / Df) : double.NaN;

    public double P => double.IsNaN(F) ? double.NaN : Probability.FisherUpper(F, Parameters - 1, Df);

    /// <summary>Fits y on the columns.</summary>
    /// <param name="columns">Columns of the design, each of length n.</param>
    /// <param name="y">Finite values, length n.</param>
    public static LinearFit Of(IReadOnlyList<DesignColumn> columns, double[] y, CancellationToken cancel = default)
    {
        int n = y.Length;
        foreach (var c in columns)
            if (c.Values.Length != n)
                throw new ArgumentException($"column '{c.Label}' must have length {n} but has {c.Values.Length}", nameof(columns));
        if (n < 2)
            return new LinearFit(n == 0 ? "No record has the reading and all terms." : "Only one record has the reading and all terms.");
        var means = new double[columns.Count];
        var scales = new double[columns.Count];
        var work = new double[columns.Count][];
        Parallel.For(0, columns.Count, j =>
        {
            double[] values = columns[j].Values;
            means[j] = Sums.Mean(values);
            work[j] = [.. values.Select(v => v - means[j])];
            double norm = HouseholderQr.Norm(work[j]);
            // what is left of a constant column is rounding
            scales[j] = norm > 1e-13 * Math.Abs(means[j]) * Math.Sqrt(n) && double.IsFinite(norm) ? norm : 0;
            for (int i = 0; i < n; i++)
                work[j][i] = scales[j] == 0 ? 0 : work[j][i] / scales[j];
        });
        var qr = new HouseholderQr(work, 1e-11, cancel);
        int[] kept = qr.Kept;
        if (n - kept.Length - 1 < 0)
            return new LinearFit($"{n} records cannot carry {kept.Length + 1} coefficients. Take fewer terms.");
        double mean = Sums.Mean(y);
        double[] rotated = [.. y.Select(v => v - mean)];
        qr.ApplyTransposed(rotated);
        double[] beta = [.. qr.Solve(rotated).Select((b, k) => b / scales[kept[k]])];
        Array.Clear(rotated, 0, kept.Length);
        qr.Apply(rotated);
        double intercept = mean - kept.Select((j, k) => means[j] * beta[k]).Sum();
        double[] residuals = rotated;
        double condition = Condition(qr);
        // small problems always, larger ones where rounding could reach the digits that are shown
        if (kept.Length > 0 && ((long)n * kept.Length <= 200_000 || condition > 1e5))
            (intercept, beta, residuals) = Refine(columns, kept, means, scales, qr, y, intercept, beta, residuals, cancel);
        return new LinearFit(kept, [.. kept.Select(j => means[j])], [.. kept.Select(j => scales[j])], qr, qr.ThinQ(n), intercept, beta, residuals, y);
    }

    // Iterative refinement of the augmented system (Bjorck 1967, BIT 7:257-278), residuals in double-double
    private static (double, double[], double[]) Refine(IReadOnlyList<DesignColumn> columns, int[] kept, double[] means, double[] scales, HouseholderQr qr, double[] y, double intercept, double[] beta, double[] residuals, CancellationToken cancel)
    {
        int n = y.Length, k = kept.Length;
        DoubleDouble a = intercept;
        DoubleDouble[] b = [.. beta.Select(x => (DoubleDouble)x)];
        var r = new DoubleDouble[n];
        for (int i = 0; i < n; i++)
            r[i] = residuals[i];
        double last = double.PositiveInfinity;
        for (int round = 0; round < 12; round++)
        {
            cancel.ThrowIfCancellationRequested();
            var f = new double[n];
            DoubleDouble g0 = 0;
            var g = new DoubleDouble[k];
            for (int i = 0; i < n; i++)
            {
                DoubleDouble fit = a + r[i];
                for (int j = 0; j < k; j++)
                    fit += Entry(columns[kept[j]], i) * b[j];
                f[i] = ((DoubleDouble)y[i] + -fit).Value;
                g0 += r[i];
                for (int j = 0; j < k; j++)
                    g[j] += Entry(columns[kept[j]], i) * r[i];
            }
            double centre = Sums.Mean(f), gravity = -g0.Value;
            double[] z = new double[k];
            for (int j = 0; j < k; j++)
                z[j] = (-(g[j].Value) - means[kept[j]] * gravity) / scales[kept[j]];
            z = qr.SolveTransposed(z);
            double[] d = [.. f.Select(v => v - centre)];
            qr.ApplyTransposed(d);
            double[] step = qr.Solve([.. Enumerable.Range(0, k).Select(j => d[j] - z[j])]);
            for (int j = 0; j < k; j++)
                d[j] = z[j];
            qr.Apply(d);
            double size = HouseholderQr.Norm(step), whole = 0, shift = 0;
            for (int j = 0; j < k; j++)
                whole += Math.Pow(b[j].Value * scales[kept[j]], 2);
            whole = Math.Sqrt(whole);
            // stop when it no longer converges; the last step is then noise
            if (!(size < 0.5 * last))
                break;
            last = size;
            for (int j = 0; j < k; j++)
            {
                double change = step[j] / scales[kept[j]];
                b[j] += change;
                shift += means[kept[j]] * change;
            }
            a += centre - shift - gravity / n;
            for (int i = 0; i < n; i++)
                r[i] += d[i] + gravity / n;
            if (size <= 1e-20 * whole)
                break;
        }
        return (a.Value, [.. b.Select(x => x.Value)], [.. r.Select(x => x.Value)]);

        static DoubleDouble Entry(DesignColumn c, int i) => new(c.Values[i], c.Low is null ? 0 : c.Low[i]);
    }

    // rough estimate from the diagonal of R
    private static double Condition(HouseholderQr qr) =>
        qr.Rank == 0 ? 1 : Enumerable.Range(0, qr.Rank).Max(j => Math.Abs(qr.R[j][j])) / Enumerable.Range(0, qr.Rank).Min(j => Math.Abs(qr.R[j][j]));

    /// <summary>Fitted values.</summary>
    public double[] Fitted(double[] y) => [.. y.Select((v, i) => v - Residuals[i])];

    /// <summary>Residual over its standard deviation as estimated without the record itself; NaN where that is not defined.</summary>
    public double StudentizedResidual(int i)
    {
        double rest = 1 - Leverage[i];
        if (rest < 1e-12 || Df < 2)
            return double.NaN;
        double without = (Rss - Residuals[i] * Residuals[i] / rest) / (Df - 1);
        return without > 0 ? Residuals[i] / Math.Sqrt(without * rest) : double.NaN;
    }

    /// <summary>Cook's distance (1977, Technometrics 19:15-18).</summary>
    public double CookDistance(int i)
    {
        double rest = 1 - Leverage[i];
        return rest < 1e-12 || Df < 1 ? double.NaN : Residuals[i] * Residuals[i] * Leverage[i] / (Parameters * S * S * rest * rest);
    }

    /// <summary>Every coefficient, the intercept first, with classical, HC3 and vehicle-aware errors.</summary>
    /// <param name="vehicles">Vehicle code per record; null when vehicles are not told apart.</param>
    public IReadOnlyList<Coefficient> Coefficients(int[]? vehicles)
    {
        double[][] maps = Maps();
        var clusters = vehicles is null ? null : new ClusterRobust(_q, Residuals, vehicles);
        var result = new Coefficient[Parameters];
        for (int c = 0; c < Parameters; c++)
        {
            double[] w = maps[c];
            double square = 0, hc3 = 0;
            foreach (double x in w)
                square += x * x;
            for (int i = 0; i < Count; i++)
            {
                double influence = w[0] / Math.Sqrt(Count);
                for (int j = 0; j < _q.Length; j++)
                    influence += w[j + 1] * _q[j][i];
                double rest = 1 - Leverage[i];
                hc3 += rest < 1e-12 ? 0 : Math.Pow(influence * Residuals[i] / rest, 2);
            }
            var (robust, df) = clusters?.Of(w) ?? (double.NaN, double.NaN);
            result[c] = new Coefficient(c == 0 ? Intercept : Beta[c - 1], S * Math.Sqrt(square), Df > 0 ? Math.Sqrt(hc3) : double.NaN, robust, df);
        }
        return result;
    }

    // coefficient c = maps[c] . (Q'y), Q with the constant column first
    private double[][] Maps()
    {
        int k = Beta.Length;
        var maps = new double[k + 1][];
        for (int j = 0; j < k; j++)
        {
            var unit = new double[k];
            unit[j] = 1 / _scales[j];
            maps[j + 1] = [0, .. _qr.SolveTransposed(unit)];
        }
        maps[0] = new double[k + 1];
        maps[0][0] = 1 / Math.Sqrt(Count);
        for (int j = 0; j < k; j++)
            for (int i = 1; i <= k; i++)
                maps[0][i] -= _means[j] * maps[j + 1][i];
        return maps;
    }

    /// <summary>Prediction for another record: its fitted value, the standard error of that value, and its leverage.</summary>
    /// <param name="row">Values of all columns of the design.</param>
    public (double Value, double StandardError, double Leverage) Predict(double[] row)
    {
        double value = Intercept;
        var d = new double[Beta.Length];
        for (int j = 0; j < Beta.Length; j++)
        {
            double x = row[Kept[j]];
            value += Beta[j] * x;
            d[j] = (x - _means[j]) / _scales[j];
        }
        double[] z = _qr.SolveTransposed(d);
        double leverage = 1.0 / Count + z.Sum(v => v * v);
        return (value, S * Math.Sqrt(leverage), leverage);
    }

    /// <summary>Generalised variance inflation of the columns of each term (Fox and Monette 1992, JASA 87:178-183).</summary>
    /// <param name="termOf">Term index of each column of the design.</param>
    public IReadOnlyDictionary<int, double> Gvif(IReadOnlyList<DesignColumn> columns)
    {
        int k = Beta.Length;
        var correlation = new double[k, k];
        for (int a = 0; a < k; a++)
            for (int b = 0; b < k; b++)
                for (int i = 0; i <= Math.Min(a, b); i++)
                    correlation[a, b] += _qr.R[a][i] * _qr.R[b][i];
        var all = MathNet.Numerics.LinearAlgebra.Matrix<double>.Build.DenseOfArray(correlation);
        double determinant = k == 0 ? 1 : all.Determinant();
        var result = new Dictionary<int, double>();
        foreach (int term in Kept.Select(j => columns[j].Term).Distinct())
        {
            int[] inside = [.. Enumerable.Range(0, k).Where(j => columns[Kept[j]].Term == term)], outside = [.. Enumerable.Range(0, k).Except(inside)];
            result[term] = outside.Length == 0 ? 1 : Part(inside) * Part(outside) / determinant;
        }
        return result;

        double Part(int[] at) => MathNet.Numerics.LinearAlgebra.Matrix<double>.Build.Dense(at.Length, at.Length, (i, j) => correlation[at[i], at[j]]).Determinant();
    }

    private static double SumOfSquares(double[] v)
    {
        double sum = 0, lost = 0;
        foreach (double x in v)
        {
            double square = x * x, next = sum + square;
            lost += sum >= square ? sum - next + square : square - next + sum;
            sum = next;
        }
        return sum + lost;
    }
}
