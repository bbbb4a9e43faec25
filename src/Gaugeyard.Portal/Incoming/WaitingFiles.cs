using System.Collections.Concurrent;

namespace Gaugeyard.Portal.Incoming;

/// <summary>
/// Uploaded files that are not stored yet. Each waits in a folder of its own under a made-up name; what its user called it is
/// kept beside as plain text and never used as a path. Files nobody confirmed within a day are removed.
/// </summary>
internal sealed class WaitingFiles(string folder)
{
    private readonly ConcurrentDictionary<string, WaitingFile> _files = new(StringComparer.Ordinal);

    /// <summary>Takes bytes in and gives them a key.</summary>
    public async Task<WaitingFile> TakeInAsync(string fileName, Stream bytes, long limit, IProgress<long>? progress, CancellationToken cancel)
    {
        Directory.CreateDirectory(folder);
        Forget();
        string key = Guid.NewGuid().ToString("N"), path = Path.Combine(folder, key);
        try
        {
            await using var file = new FileStream(path, FileMode.CreateNew, FileAccess.Write, FileShare.None, 1 << 16, useAsync: true);
            var buffer = new byte[1 << 16];
            long total = 0;
            for (int read; (read = await bytes.ReadAsync(buffer, cancel)) > 0;)
            {
                total += read;
                if (total > limit)
                    throw new Api.RequestException(413, "The file is too large", $"'{fileName}' is larger than {limit / (1024 * 1024)} MB, the limit of this portal. Split it, or raise Gaugeyard:Limits:FileBytes.");
                await file.WriteAsync(buffer.AsMemory(0, read), cancel);
                progress?.Report(total);
            }
        }
        catch
        {
            File.Delete(path);
            throw;
        }
        return _files[key] = new WaitingFile(key, CleanName(fileName), path, DateTime.UtcNow);
    }

    public WaitingFile? Find(string key) => _files.GetValueOrDefault(key);

    public void Remove(WaitingFile file)
    {
        _files.TryRemove(file.Key, out _);
        File.Delete(file.Path);
    }

    /// <summary>Removes what an earlier process left behind.</summary>
    public void Clear()
    {
        if (Directory.Exists(folder))
            foreach (string path in Directory.EnumerateFiles(folder))
                File.Delete(path);
    }

    private void Forget()
    {
        foreach (var file in _files.Values)
            if (DateTime.UtcNow - file.At > TimeSpan.FromDays(1))
                Remove(file);
    }

    // only the last part of what a browser sends, without control characters
    private static string CleanName(string name)
    {
        string last = name.Replace('\\', '/').Split('/')[^1];
        string clean = new([.. last.Where(c => !char.IsControl(c)).Take(200)]);
        return clean.Length == 0 ? "file" : clean;
    }
}

/// <summary>A file that waits to be confirmed.</summary>
internal sealed record WaitingFile(string Key, string FileName, string Path, DateTime At);
