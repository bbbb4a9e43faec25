using System.Net;
using System.Net.Http.Json;
using System.Text.Json;
using System.Text.Json.Nodes;
using Xunit;

namespace Gaugeyard.Browser.Tests.Driving;

/// <summary>The portal as a script sees it.</summary>
internal sealed class PortalOverHttp(string address) : IDisposable
{
    private readonly HttpClient _http = new() { BaseAddress = new Uri(address + "/api/v1/"), Timeout = TimeSpan.FromMinutes(10) };

    /// <summary>Uploads a file and gives the run set.</summary>
    public async Task<JsonNode> UploadAsync(string path, string name)
    {
        using var form = new MultipartFormDataContent
        {
            { new StringContent(name), "name" },
            { new ByteArrayContent(await File.ReadAllBytesAsync(path)), "file", Path.GetFileName(path) },
        };
        return await AnswerOf(await _http.PostAsync("run-sets", form), HttpStatusCode.Created);
    }

    public async Task<JsonNode> AskAsync(string address, object question, HttpStatusCode expected = HttpStatusCode.OK) =>
        await AnswerOf(await _http.PostAsJsonAsync(address, question), expected);

    public async Task<JsonNode> GetAsync(string address) => await AnswerOf(await _http.GetAsync(address), HttpStatusCode.OK);

    public async Task<byte[]> DownloadAsync(string address) => await _http.GetByteArrayAsync(address);

    /// <summary>Id of the demo season.</summary>
    public async Task<string> DemoAsync() =>
        (await GetAsync("run-sets")).AsArray().Single(s => s!["name"]!.GetValue<string>().StartsWith("Ottermoor", StringComparison.Ordinal))!["id"]!.GetValue<string>();

    private static async Task<JsonNode> AnswerOf(HttpResponseMessage response, HttpStatusCode expected)
    {
        string text = await response.Content.ReadAsStringAsync();
        Assert.True(response.StatusCode == expected, $"{response.RequestMessage!.Method} {response.RequestMessage.RequestUri} answered {(int)response.StatusCode}: {text[..Math.Min(text.Length, 600)]}");
        return JsonNode.Parse(text) ?? throw new JsonException("The answer is empty.");
    }

    public void Dispose() => _http.Dispose();
}
