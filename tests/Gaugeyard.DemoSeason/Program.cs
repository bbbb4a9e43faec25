using Gaugeyard.DemoSeason;

if (args.Length is < 1 or > 2)
{
    Console.Error.WriteLine("Say where the files go: dotnet run --project tests/Gaugeyard.DemoSeason -- demo-data [folder for the truth, default tests/Gaugeyard.Browser.Tests/Truth]");
    return 1;
}
Write(args[0], DemoFiles.ForUsers);
Write(args.Length == 2 ? args[1] : Path.Combine("tests", "Gaugeyard.Browser.Tests", "Truth"), DemoFiles.ForTests);
return 0;

static void Write(string folder, IReadOnlyList<(string Name, byte[] Bytes)> files)
{
    Directory.CreateDirectory(folder);
    foreach (var (name, bytes) in files)
    {
        File.WriteAllBytes(Path.Combine(folder, name), bytes);
        Console.WriteLine($"{Path.Combine(folder, name)}: {bytes.Length} bytes");
    }
}
