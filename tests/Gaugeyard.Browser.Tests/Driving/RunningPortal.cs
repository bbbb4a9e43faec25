using System.Diagnostics;
using System.Net;
using System.Net.Sockets;
using System.Text;

namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>The built portal as a process of its own: Production, a free port of this machine, a data folder that did not exist before.</summary>
internal sealed class RunningPortal : IAsyncDisposable
{
    private readonly Process _process;
    private readonly string _data;
    private readonly StringBuilder _said;

    private RunningPortal(Process process, string address, string data, StringBuilder said) => (_process, Address, _data, _said) = (process, address, data, said);

    /// <summary>Where it listens, without a slash at the end.</summary>
    public string Address { get; }

    /// <summary>Everything it wrote to its console.</summary>
    public string Said
    {
        get
        {
            lock (_said)
                return _said.ToString();
        }
    }

    /// <exception cref="InvalidOperationException">It did not become ready; the message holds what it wrote.</exception>
    public static async Task<RunningPortal> StartAsync()
    {
        // the same configuration as these tests
        string configuration = AppContext.BaseDirectory.Replace('\\', '/').Contains("/Release/", StringComparison.Ordinal) ? "Release" : "Debug";
        string program = Path.Combine(Repository.Root, "src", "Gaugeyard.Portal", "bin", configuration, "net10.0", "Gaugeyard.Portal.dll");
        if (!File.Exists(program))
            throw new InvalidOperationException($"The portal is not built: {program} does not exist. Build the solution first.");
        string data = Directory.CreateTempSubdirectory("gaugeyard-browser-tests").FullName;
        string address = $"http://127.0.0.1:{FreePort()}";
        var start = new ProcessStartInfo("dotnet", [program, "--contentRoot", Repository.Root, "--urls", address, "--Gaugeyard:Data", Path.Combine(data, "store")])
        {
            WorkingDirectory = Repository.Root,
            RedirectStandardOutput = true,
            RedirectStandardError = true,
        };
        start.Environment["ASPNETCORE_ENVIRONMENT"] = "Production";
        start.Environment.Remove("ASPNETCORE_URLS");
        start.Environment.Remove("ASPNETCORE_HTTP_PORTS");
        var said = new StringBuilder();
        var process = new Process { StartInfo = start };
        void Hear(object _, DataReceivedEventArgs line)
        {
            lock (said)
                said.AppendLine(line.Data);
        }
        process.OutputDataReceived += Hear;
        process.ErrorDataReceived += Hear;
        process.Start();
        process.BeginOutputReadLine();
        process.BeginErrorReadLine();
        var portal = new RunningPortal(process, address, data, said);
        await portal.UntilReadyAsync(TimeSpan.FromMinutes(2));
        return portal;
    }

    private async Task UntilReadyAsync(TimeSpan patience)
    {
        using var http = new HttpClient();
        var clock = Stopwatch.StartNew();
        while (clock.Elapsed < patience && !_process.HasExited)
        {
            try
            {
                if ((await http.GetAsync(Address + "/health/ready")).IsSuccessStatusCode)
                    return;
            }
            catch (HttpRequestException)
            {
                // not listening yet
            }
            await Task.Delay(200);
        }
        string said = Said;
        await DisposeAsync();
        throw new InvalidOperationException($"The portal did not become ready within {patience.TotalSeconds:0} s. It said:\n{said}");
    }

    private static int FreePort()
    {
        using var listener = new TcpListener(IPAddress.Loopback, 0);
        listener.Start();
        return ((IPEndPoint)listener.LocalEndpoint).Port;
    }

    public async ValueTask DisposeAsync()
    {
        if (!_process.HasExited)
        {
            _process.Kill(entireProcessTree: true);
            await _process.WaitForExitAsync();
        }
        _process.Dispose();
        Directory.Delete(_data, recursive: true);
    }
}
