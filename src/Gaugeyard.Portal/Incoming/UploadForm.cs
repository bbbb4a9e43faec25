using System.Text.Json;
using Gaugeyard.Analysis.Work;
using Gaugeyard.Exchange;
using Gaugeyard.Portal.Api;
using Gaugeyard.Records.RunSets;
using Microsoft.AspNetCore.WebUtilities;
using Microsoft.Net.Http.Headers;

namespace Gaugeyard.Portal.Incoming;

/// <summary>Reads a multipart upload as it arrives: files go straight to where they wait, fields are small.</summary>
internal static class UploadForm
{
    private const int FieldBytes = 4 * 1024 * 1024;

    public static async Task<Upload> ReadAsync(HttpContext http, Intake intake, CancellationToken cancel)
    {
        if (!MediaTypeHeaderValue.TryParse(http.Request.ContentType, out var type) || !type.MediaType.Equals("multipart/form-data", StringComparison.OrdinalIgnoreCase) || HeaderUtilities.RemoveQuotes(type.Boundary).Value is not { Length: > 0 } boundary)
            throw new RequestException(400, "The request is wrong", "Send the file as multipart/form-data in a field called 'file'.");
        var reader = new MultipartReader(boundary, http.Request.Body);
        var files = new List<WaitingFile>();
        var fields = new Dictionary<string, string>(StringComparer.Ordinal);
        try
        {
            while (await reader.ReadNextSectionAsync(cancel) is { } section)
            {
                if (!ContentDispositionHeaderValue.TryParse(section.ContentDisposition, out var disposition))
                    continue;
                string field = HeaderUtilities.RemoveQuotes(disposition.Name).Value ?? "";
                string? fileName = HeaderUtilities.RemoveQuotes(disposition.FileNameStar.HasValue ? disposition.FileNameStar : disposition.FileName).Value;
                if (!string.IsNullOrEmpty(fileName))
                    files.Add(await intake.Waiting.TakeInAsync(fileName, section.Body, intake.FileBytes, null, cancel));
                else
                    fields[field] = await TextAsync(section.Body, field, cancel);
            }
            if (files.Count == 0)
                throw new RequestException(400, "The request is wrong", "There is no file in the request. Send it in a field called 'file'.");
            return new Upload(files, fields.GetValueOrDefault("name"), fields.GetValueOrDefault("note") ?? "", Choices(fields), Repeat(fields));
        }
        catch
        {
            foreach (var file in files)
                intake.Waiting.Remove(file);
            throw;
        }
    }

    private static ReadChoices Choices(Dictionary<string, string> fields)
    {
        var choices = fields.TryGetValue("reading", out string? reading) ? JsonSerializer.Deserialize<ReadChoices>(reading, WireFormat.Json)! : new ReadChoices();
        if (fields.TryGetValue("columns", out string? columns) && !string.IsNullOrWhiteSpace(columns))
            choices = choices with { Columns = JsonSerializer.Deserialize<List<ColumnChoice>>(columns, WireFormat.Json)! };
        return choices;
    }

    private static OnRepeat Repeat(Dictionary<string, string> fields) => fields.GetValueOrDefault("onRepeat") switch
    {
        null or "" or "keep" => OnRepeat.Keep,
        "skip" => OnRepeat.Skip,
        "replace" => OnRepeat.Replace,
        var other => throw new RequestException(400, "The request is wrong", $"onRepeat must be keep, skip or replace, but is '{other}'."),
    };

    private static async Task<string> TextAsync(Stream body, string field, CancellationToken cancel)
    {
        using var text = new MemoryStream();
        var buffer = new byte[8192];
        for (int read; (read = await body.ReadAsync(buffer, cancel)) > 0;)
        {
            if (text.Length + read > FieldBytes)
                throw new RequestException(413, "The request is too large", $"The field '{field}' is longer than {FieldBytes / (1024 * 1024)} MB.");
            text.Write(buffer, 0, read);
        }
        return System.Text.Encoding.UTF8.GetString(text.ToArray());
    }
}
