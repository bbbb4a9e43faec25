using System.Security.Cryptography;
using System.Text;
using System.Text.Encodings.Web;
using System.Text.Json;
using System.Text.Json.Serialization;

namespace Gaugeyard.Analysis.Work;

/// <summary>How questions and answers are written as JSON, for the HTTP interface, the cache key and the fingerprint alike.</summary>
public static class WireFormat
{
    /// <summary>camelCase, full double precision, null for what is not a number.</summary>
    public static JsonSerializerOptions Json { get; } = Make();

    /// <summary>Sets up options that a framework made in the same way.</summary>
    public static void Apply(JsonSerializerOptions options)
    {
        options.PropertyNamingPolicy = JsonNamingPolicy.CamelCase;
        options.DictionaryKeyPolicy = null;
        options.PropertyNameCaseInsensitive = true;
        options.Encoder = JavaScriptEncoder.UnsafeRelaxedJsonEscaping;
        options.NumberHandling = JsonNumberHandling.Strict;
        options.Converters.Add(new FiniteDoubleConverter());
    }

    /// <summary>Short hash over a revision and a question: the same question on the same data has the same fingerprint.</summary>
    public static string Fingerprint(string content, object question)
    {
        byte[] hash = SHA256.HashData(Encoding.UTF8.GetBytes(content + "\n" + question.GetType().Name + "\n" + JsonSerializer.Serialize(question, question.GetType(), Json)));
        return Convert.ToHexStringLower(hash.AsSpan(0, 12));
    }

    private static JsonSerializerOptions Make()
    {
        var options = new JsonSerializerOptions(JsonSerializerDefaults.Web);
        Apply(options);
        options.MakeReadOnly(populateMissingResolver: true);
        return options;
    }

    /// <summary>Numbers that are not finite become null: absent values are never NaN on the wire.</summary>
    private sealed class FiniteDoubleConverter : JsonConverter<double>
    {
        public override double Read(ref Utf8JsonReader reader, Type type, JsonSerializerOptions options) => reader.GetDouble();

        public override void Write(Utf8JsonWriter writer, double value, JsonSerializerOptions options)
        {
            if (double.IsFinite(value))
                writer.WriteNumberValue(value);
            else
                writer.WriteNullValue();
        }

        public override double ReadAsPropertyName(ref Utf8JsonReader reader, Type type, JsonSerializerOptions options) =>
            double.Parse(reader.GetString()!, System.Globalization.CultureInfo.InvariantCulture);

        public override void WriteAsPropertyName(Utf8JsonWriter writer, double value, JsonSerializerOptions options) =>
            writer.WritePropertyName(value.ToString("R", System.Globalization.CultureInfo.InvariantCulture));
    }
}
