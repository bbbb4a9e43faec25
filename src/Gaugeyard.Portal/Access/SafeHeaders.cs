namespace Gaugeyard.Portal.Access;

/// <summary>Response headers that keep pages from doing what they need not: no foreign scripts, no eval, no framing.</summary>
internal sealed class SafeHeaders(RequestDelegate next)
{
    // inline styles are needed by the component library; scripts come from this origin only
    private const string Policy = "default-src 'self'; script-src 'self'; style-src 'self' 'unsafe-inline'; img-src 'self' data: blob:; font-src 'self'; connect-src 'self'; object-src 'none'; base-uri 'self'; frame-ancestors 'none'; form-action 'self'";

    public Task InvokeAsync(HttpContext context)
    {
        var headers = context.Response.Headers;
        headers.ContentSecurityPolicy = Policy;
        headers.XContentTypeOptions = "nosniff";
        headers["Referrer-Policy"] = "same-origin";
        headers["Permissions-Policy"] = "camera=(), microphone=(), geolocation=()";
        return next(context);
    }
}
