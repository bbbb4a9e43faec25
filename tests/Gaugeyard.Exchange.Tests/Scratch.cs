using System.Text;
using Gaugeyard.Records.Columns;
using Xunit;

namespace Gaugeyard.Exchange.Tests;

/// <summary>Reads text and bytes through a file of their own, as an upload would.</summary>
internal static class Scratch
{
    public static ImportedTable Read(string text, ReadChoices? choices = null, string name = "runs.csv", ReadLimits? limits = null, Encoding? encoding = null) =>
        Read((encoding ?? new UTF8Encoding(false)).GetBytes(text), choices, name, limits);

    public static ImportedTable Read(byte[] bytes, ReadChoices? choices = null, string name = "runs.csv", ReadLimits? limits = null) =>
        With(bytes, path => TableReader.Read(path, name, choices, limits));

    public static ReadPreview Inspect(string text, ReadChoices? choices = null, string name = "runs.csv", ReadLimits? limits = null) =>
        With(new UTF8Encoding(false).GetBytes(text), path => TableReader.Inspect(path, name, choices, limits));

    public static string Refused(byte[] bytes, string name = "runs.csv", ReadLimits? limits = null, ReadChoices? choices = null)
    {
        string message = Assert.Throws<UnreadableFileException>(() => Read(bytes, choices, name, limits)).Message;
        Assert.Contains(name, message, StringComparison.Ordinal);
        Assert.EndsWith(".", message, StringComparison.Ordinal);
        Assert.True(message.Length > name.Length + 30, message);
        return message;
    }

    public static string Refused(string text, string name = "runs.csv", ReadLimits? limits = null) => Refused(Encoding.UTF8.GetBytes(text), name, limits);

    public static T With<T>(byte[] bytes, Func<string, T> use)
    {
        string path = Path.GetTempFileName();
        try
        {
            File.WriteAllBytes(path, bytes);
            return use(path);
        }
        finally
        {
            File.Delete(path);
        }
    }

    public static Column Column(this ImportedTable table, string name) => table.Columns.Single(c => c.Name == name);

    public static double[] Numbers(this ImportedTable table, string name) => Assert.IsType<NumberColumn>(table.Column(name)).Values;

    public static string?[] Texts(this ImportedTable table, string name)
    {
        var column = table.Column(name);
        return [.. Enumerable.Range(0, column.Count).Select(column.TextAt)];
    }

    public static ColumnKind Kind(this ImportedTable table, string name) => table.Column(name).Definition.Kind;

    public static ColumnPreview Preview(this ImportedTable table, string name) => table.Reading.Columns.Single(c => c.Definition.Name == name);
}
