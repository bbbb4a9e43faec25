namespace Gaugeyard.Statistics.Multivariate;

/// <summary>One merge of the tree. Nodes 0 .. k-1 are the items; merge i makes node k + i.</summary>
public sealed record TreeMerge(int Left, int Right, double Height);

/// <summary>Average-linkage tree (unweighted pair groups; Sokal and Michener 1958).</summary>
public static class AverageLinkage
{
    /// <summary>Merges the closest two clusters until one is left; O(k^3).</summary>
    /// <param name="distances">Symmetric k x k.</param>
    public static IReadOnlyList<TreeMerge> Of(double[,] distances)
    {
        int k = distances.GetLength(0);
        if (distances.GetLength(1) != k)
            throw new ArgumentException($"distances must be square but are {k} x {distances.GetLength(1)}", nameof(distances));
        var d = (double[,])distances.Clone();
        int[] node = [.. Enumerable.Range(0, k)], size = [.. Enumerable.Repeat(1, k)];
        var alive = Enumerable.Range(0, k).ToList();
        var merges = new List<TreeMerge>();
        while (alive.Count > 1)
        {
            int a = -1, b = -1;
            double best = double.PositiveInfinity;
            foreach (int i in alive)
                foreach (int j in alive)
                    if (i < j && d[i, j] < best)
                        (a, b, best) = (i, j, d[i, j]);
            if (a < 0)
                throw new ArgumentException("distances must be numbers", nameof(distances));
            merges.Add(new TreeMerge(node[a], node[b], best));
            foreach (int i in alive)
                if (i != a && i != b)
                    d[a, i] = d[i, a] = (size[a] * d[a, i] + size[b] * d[b, i]) / (size[a] + size[b]);
            size[a] += size[b];
            node[a] = k + merges.Count - 1;
            alive.Remove(b);
        }
        return merges;
    }
}
