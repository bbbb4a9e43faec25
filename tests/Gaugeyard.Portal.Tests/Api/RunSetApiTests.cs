using System.Net;
using System.Net.Http.Headers;
using System.Net.Http.Json;
using System.Text.Json;
using Microsoft.AspNetCore.Mvc.Testing;
using Xunit;

namespace Gaugeyard.Portal.Tests.Api;

/// <summary>The HTTP interface on the real host with a fresh database file.</summary>
public sealed class RunSetApiTests : IDisposable
{
    private readonly string _folder = Directory.CreateTempSubdirectory("gaugeyard-").FullName;
    private readonly WebApplicationFactory<Program> _host;
    private readonly HttpClient _client;

    public RunSetApiTests()
    {
        _host = new WebApplicationFactory<Program>().WithWebHostBuilder(b =>
        {
            b.UseSetting("Gaugeyard:Data", _folder);
            b.UseSetting("Gaugeyard:Demo", "false");
        });
        _client = _host.CreateClient();
    }

    [Fact]
    public async Task Nothing_is_lost_from_upload_to_restore()
    {
        const string text = "run,vehicle,class,city\nR1,V1,van,9.1\nR2,V1,van,9.3\nR3,V2,car,6.2\nR4,V3,car,\n";
        var made = await Upload("/api/v1/run-sets", text, "four runs.csv");
        string id = made.GetProperty("id").GetString()!;
        Assert.Equal((1, 4), (made.GetProperty("revision").GetInt32(), made.GetProperty("records").GetInt32()));
        Assert.Equal(text, await _client.GetStringAsync($"/api/v1/run-sets/{id}/sources/1"));

        var corrected = await Post($"/api/v1/run-sets/{id}/corrections", new[] { new { record = 1, column = "city", value = 9.4, reason = "sheet re-read" } }, "\"1\"");
        Assert.Equal(HttpStatusCode.OK, corrected.Status);
        var stale = await Post($"/api/v1/run-sets/{id}/corrections", new[] { new { record = 1, column = "city", value = 1.0, reason = "stale" } }, "\"1\"");
        Assert.Equal(HttpStatusCode.PreconditionFailed, stale.Status);
        Assert.Contains("Nothing was changed", stale.Body.GetProperty("detail").GetString());
        var wrong = await Post($"/api/v1/run-sets/{id}/corrections", new[] { new { record = 99, column = "city", value = 1.0, reason = "no such" } }, "\"2\"");
        Assert.Equal(HttpStatusCode.UnprocessableEntity, wrong.Status);
        Assert.Equal(99, wrong.Body.GetProperty("findings")[0].GetProperty("record").GetInt32());

        var restored = await Post($"/api/v1/run-sets/{id}/restore", new { revision = 1 }, "\"2\"");
        Assert.Equal(3, restored.Body.GetProperty("revision").GetInt32());
        var rows = await _client.GetFromJsonAsync<JsonElement>($"/api/v1/run-sets/{id}/records");
        Assert.Equal(9.1, rows[0].GetProperty("values").GetProperty("city").GetDouble());
        Assert.Equal("missing", rows[3].GetProperty("states").GetProperty("city").GetString());
    }

    [Fact]
    public async Task Wrong_requests_get_a_sentence_that_says_what_to_do()
    {
        string id = (await Upload("/api/v1/run-sets", "a,b\n1,x\n2,y\n3,x\n", "small.csv")).GetProperty("id").GetString()!;
        Assert.Equal(HttpStatusCode.NotFound, (await Post("/api/v1/run-sets/none/groups", new { readings = new[] { "a" } })).Status);
        var column = await Post($"/api/v1/run-sets/{id}/groups", new { readings = new[] { "nothing" }, by = Array.Empty<string>() });
        Assert.Equal(HttpStatusCode.BadRequest, column.Status);
        Assert.Contains("The columns are: a, b", column.Body.GetProperty("detail").GetString());
        var data = await Post($"/api/v1/run-sets/{id}/comparison", new { reading = "a", by = "a" });
        Assert.Equal(HttpStatusCode.UnprocessableEntity, data.Status);
        Assert.False(string.IsNullOrEmpty(data.Body.GetProperty("detail").GetString()));
        var kind = await Post($"/api/v1/run-sets/{id}/comparison", new { reading = "a", by = "b", pairs = "guess" });
        Assert.Equal(HttpStatusCode.BadRequest, kind.Status);
        var ignored = await Post($"/api/v1/run-sets/{id}/groups", new { readings = new[] { "a" }, wibble = 1 });
        Assert.Contains("wibble", ignored.Body.GetProperty("notes").ToString());
    }

    [Fact]
    public async Task Long_work_can_be_fetched_later_and_gives_the_same_answer()
    {
        string id = (await Upload("/api/v1/run-sets", "a,b\n" + string.Join('\n', Enumerable.Range(0, 40).Select(i => $"{i * 37 % 11},{(i % 2 == 0 ? "x" : "y")}")), "forty.csv")).GetProperty("id").GetString()!;
        object question = new { readings = new[] { "a" }, by = new[] { "b" } };
        var direct = await Post($"/api/v1/run-sets/{id}/groups", question);
        using var request = new HttpRequestMessage(HttpMethod.Post, $"/api/v1/run-sets/{id}/groups") { Content = JsonContent.Create(question) };
        request.Headers.Add("Prefer", "respond-async");
        using var accepted = await _client.SendAsync(request);
        Assert.Equal(HttpStatusCode.Accepted, accepted.StatusCode);
        JsonElement answer = default;
        for (int i = 0; i < 100; i++)
        {
            answer = await _client.GetFromJsonAsync<JsonElement>(accepted.Headers.Location);
            if (answer.TryGetProperty("groups", out _))
                break;
            await Task.Delay(50);
        }
        Assert.Equal(direct.Body.ToString(), answer.ToString());
    }

    [Fact]
    public async Task Pages_and_description_are_served_with_safe_headers()
    {
        using var page = await _client.GetAsync("/");
        Assert.Equal(HttpStatusCode.OK, page.StatusCode);
        string policy = page.Headers.GetValues("Content-Security-Policy").First();
        Assert.Contains("script-src 'self'", policy);
        Assert.DoesNotContain("unsafe-eval", policy);
        Assert.Equal(HttpStatusCode.OK, (await _client.GetAsync("/openapi/v1.json")).StatusCode);
        Assert.Equal(HttpStatusCode.OK, (await _client.GetAsync("/health/ready")).StatusCode);
    }

    public void Dispose()
    {
        _client.Dispose();
        _host.Dispose();
        Microsoft.Data.Sqlite.SqliteConnection.ClearAllPools();
        Directory.Delete(_folder, recursive: true);
    }

    private async Task<JsonElement> Upload(string to, string text, string name)
    {
        using var form = new MultipartFormDataContent { { new ByteArrayContent(System.Text.Encoding.UTF8.GetBytes(text)), "file", name } };
        using var response = await _client.PostAsync(to, form);
        var body = await response.Content.ReadFromJsonAsync<JsonElement>();
        Assert.True(response.StatusCode == HttpStatusCode.Created, body.ToString());
        return body;
    }

    private async Task<(HttpStatusCode Status, JsonElement Body)> Post(string to, object body, string? match = null)
    {
        using var request = new HttpRequestMessage(HttpMethod.Post, to) { Content = JsonContent.Create(body) };
        if (match is not null)
            request.Headers.IfMatch.Add(EntityTagHeaderValue.Parse(match));
        using var response = await _client.SendAsync(request);
        return (response.StatusCode, await response.Content.ReadFromJsonAsync<JsonElement>());
    }
}
