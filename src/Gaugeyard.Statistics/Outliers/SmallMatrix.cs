namespace Gaugeyard.Statistics.Outliers;

/// <summary>The few operations on small symmetric matrices (p up to some dozens) that robust covariance needs, row-major.</summary>
internal static class SmallMatrix
{
    /// <summary>Lower Cholesky factor in place; false when a pivot falls below tolerance times the largest diagonal element.</summary>
    public static bool Cholesky(double[] a, int p, double tolerance = 1e-13)
    {
        double largest = 0;
        for (int i = 0; i < p; i++)
            largest = Math.Max(largest, a[i * p + i]);
        if (!(largest > 0))
            return false;
        for (int j = 0; j < p; j++)
        {
            double d = a[j * p + j];
            for (int k = 0; k < j; k++)
                d -= a[j * p + k] * a[j * p + k];
            if (!(d > tolerance * largest))
                return false;
            d = Math.Sqrt(d);
            a[j * p + j] = d;
            for (int i = j + 1; i < p; i++)
            {
                double s = a[i * p + j];
                for (int k = 0; k < j; k++)
                    s -= a[i * p + k] * a[j * p + k];
                a[i * p + j] = s / d;
            }
            for (int i = 0; i < j; i++)
                a[i * p + j] = 0;
        }
        return true;
    }

    /// <summary>Inverse of a lower-triangular factor.</summary>
    public static double[] InvertLower(double[] l, int p)
    {
        var inverse = new double[p * p];
        for (int j = 0; j < p; j++)
        {
            inverse[j * p + j] = 1 / l[j * p + j];
            for (int i = j + 1; i < p; i++)
            {
                double s = 0;
                for (int k = j; k < i; k++)
                    s -= l[i * p + k] * inverse[k * p + j];
                inverse[i * p + j] = s / l[i * p + i];
            }
        }
        return inverse;
    }

    /// <summary>Log-determinant of a symmetric matrix; negative infinity when it is not positive definite.</summary>
    public static double LogDeterminant(double[] a, int p)
    {
        double[] l = (double[])a.Clone();
        if (!Cholesky(l, p))
            return double.NegativeInfinity;
        double sum = 0;
        for (int i = 0; i < p; i++)
            sum += Math.Log(l[i * p + i]);
        return 2 * sum;
    }

    /// <summary>Inverse of a positive definite matrix; null when it is not.</summary>
    public static double[]? Inverse(double[] a, int p)
    {
        double[] l = (double[])a.Clone();
        if (!Cholesky(l, p))
            return null;
        double[] m = InvertLower(l, p);
        var inverse = new double[p * p];
        for (int i = 0; i < p; i++)
            for (int j = 0; j <= i; j++)
            {
                double s = 0;
                for (int k = i; k < p; k++)
                    s += m[k * p + i] * m[k * p + j];
                inverse[i * p + j] = inverse[j * p + i] = s;
            }
        return inverse;
    }

    /// <summary>Eigenvectors of a symmetric matrix as columns, by Jacobi rotations (Golub and Van Loan, Matrix Computations, 8.5).</summary>
    public static double[] Eigenvectors(double[] symmetric, int p)
    {
        double[] a = (double[])symmetric.Clone();
        var v = new double[p * p];
        for (int i = 0; i < p; i++)
            v[i * p + i] = 1;
        for (int sweep = 0; sweep < 60; sweep++)
        {
            double off = 0, on = 0;
            for (int i = 0; i < p; i++)
            {
                on += a[i * p + i] * a[i * p + i];
                for (int j = 0; j < i; j++)
                    off += a[i * p + j] * a[i * p + j];
            }
            if (off <= 1e-30 * on)
                break;
            for (int i = 0; i < p - 1; i++)
                for (int j = i + 1; j < p; j++)
                {
                    double apq = a[i * p + j];
                    if (apq == 0)
                        continue;
                    double tau = (a[j * p + j] - a[i * p + i]) / (2 * apq);
                    double t = (tau >= 0 ? 1 : -1) / (Math.Abs(tau) + Math.Sqrt(1 + tau * tau)), c = 1 / Math.Sqrt(1 + t * t), s = t * c;
                    for (int k = 0; k < p; k++)
                    {
                        double x = a[k * p + i], y = a[k * p + j];
                        a[k * p + i] = c * x - s * y;
                        a[k * p + j] = s * x + c * y;
                    }
                    for (int k = 0; k < p; k++)
                    {
                        double x = a[i * p + k], y = a[j * p + k];
                        a[i * p + k] = c * x - s * y;
                        a[j * p + k] = s * x + c * y;
                    }
                    for (int k = 0; k < p; k++)
                    {
                        double x = v[k * p + i], y = v[k * p + j];
                        v[k * p + i] = c * x - s * y;
                        v[k * p + j] = s * x + c * y;
                    }
                }
        }
        return v;
    }
}
