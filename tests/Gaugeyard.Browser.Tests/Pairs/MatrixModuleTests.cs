using System.Text.Json;
using Gaugeyard.Browser.Tests.Driving;
using Xunit;

namespace Gaugeyard.Browser.Tests.Pairs;

/// <summary>The numeric parts of the scatter matrix, run where they run: in a browser.</summary>
public sealed class MatrixModuleTests(PortalInBrowser portal)
{
    private async Task<JsonElement> RunAsync(string script)
    {
        var page = await portal.OpenAsync();
        await page.GotoAsync("/shell/mark.svg");
        await page.GotoAsync("/health/live");
        var answer = await page.EvaluateAsync<JsonElement>(script);
        await page.Context.CloseAsync();
        return answer;
    }

    [Fact]
    public async Task Axes_hold_everything_unless_a_few_values_would_shrink_the_rest()
    {
        var a = await RunAsync("""
            async () => {
              const { axisOf, placesOf, ticksOf, say, TOP, MISSING } = await import("/pairs/scales.js");
              const calm = Float64Array.from({ length: 200 }, (_, i) => i / 10), wild = calm.slice();
              wild[7] = 5000; calm[3] = NaN;
              const axis = axisOf(calm), closer = axisOf(wild), whole = axisOf(wild, true), places = placesOf(wild, closer);
              return { low: axis.low, high: axis.high, known: axis.known, beyond: closer.beyond, closerHigh: closer.high, wholeHigh: whole.high, edge: places[7] === TOP,
                missing: placesOf(calm, axis)[3] === MISSING, ticks: ticksOf(0, 19.9, 4).ticks, minus: say(-2.5, 1), zero: say(-0, 0), same: axisOf(Float64Array.of(4, 4)).high > 4, none: axisOf(Float64Array.of(NaN)).known };
            }
            """);
        Assert.Equal(0, a.GetProperty("low").GetDouble());
        Assert.Equal(19.9, a.GetProperty("high").GetDouble(), 9);
        Assert.Equal(199, a.GetProperty("known").GetInt32());
        Assert.Equal(1, a.GetProperty("beyond").GetInt32());
        Assert.InRange(a.GetProperty("closerHigh").GetDouble(), 19.9, 40);
        Assert.Equal(5000, a.GetProperty("wholeHigh").GetDouble());
        Assert.True(a.GetProperty("edge").GetBoolean());
        Assert.True(a.GetProperty("missing").GetBoolean());
        Assert.Equal([0, 5, 10, 15], a.GetProperty("ticks").EnumerateArray().Select(t => t.GetDouble()));
        Assert.Equal("−2.5", a.GetProperty("minus").GetString());
        Assert.Equal("0", a.GetProperty("zero").GetString());
        Assert.True(a.GetProperty("same").GetBoolean());
        Assert.Equal(0, a.GetProperty("none").GetInt32());
    }

    [Fact]
    public async Task Box_lasso_and_nearest_take_what_they_hold()
    {
        var a = await RunAsync("""
            async () => {
              const { inBox, inLasso, nearest } = await import("/pairs/choose.js");
              const { MISSING } = await import("/pairs/scales.js");
              const px = Uint16Array.of(10, 20, 30, 40, MISSING), py = Uint16Array.of(10, 20, 30, 40, 20), box = new Uint8Array(5), margin = new Uint8Array(5), lasso = new Uint8Array(5);
              inBox(px, py, { x0: 15, x1: 35, y0: 0, y1: 30 }, box);
              inBox(px, py, { x0: -5, x1: 5, y0: 15, y1: 25, marginX: true }, margin);
              inLasso(px, py, [[0, 0], [25, 0], [25, 50], [0, 50]], lasso);
              return { box: [...box], margin: [...margin], lasso: [...lasso], near: nearest(px, py, 21, 22, { w: 60000, h: 60000 }, 9), far: nearest(px, py, 300, 300, { w: 60000, h: 60000 }, 9) };
            }
            """);
        static int[] Of(JsonElement e) => [.. e.EnumerateArray().Select(x => x.GetInt32())];
        Assert.Equal([0, 1, 1, 0, 0], Of(a.GetProperty("box")));
        Assert.Equal([0, 0, 0, 0, 1], Of(a.GetProperty("margin")));
        Assert.Equal([1, 1, 0, 0, 0], Of(a.GetProperty("lasso")));
        Assert.Equal(1, a.GetProperty("near").GetInt32());
        Assert.Equal(-1, a.GetProperty("far").GetInt32());
    }

    [Fact]
    public async Task Every_point_leaves_ink_among_very_many()
    {
        // 300,000 points in a corner and 40 single ones elsewhere: a sample would lose most of the single ones
        var a = await RunAsync("""
            async () => {
              const { paintDense } = await import("/pairs/paint.js");
              const n = 300040, px = new Uint16Array(n), py = new Uint16Array(n), ids = new Uint8Array(n);
              for (let i = 0; i < 300000; i++) { px[i] = (i * 7919) % 15000; py[i] = (i * 104729) % 15000; }
              for (let k = 0; k < 40; k++) { px[300000 + k] = 20000 + k * 900; py[300000 + k] = 57000 - k * 800; ids[300000 + k] = 1; }
              const canvas = document.createElement("canvas");
              canvas.width = canvas.height = 400;
              const g = canvas.getContext("2d"), frame = { x: 0, y: 0, w: 400, h: 400, margin: 0 };
              paintDense(g, frame, px, py, [{ rgb: [0, 0, 255] }, { rgb: [255, 0, 0] }], ids, 1, 1);
              const data = g.getImageData(0, 0, 400, 400).data;
              let seen = 0;
              for (let k = 0; k < 40; k++) {
                const x = Math.floor(px[300000 + k] * 399 / 60000), y = Math.floor(399 - py[300000 + k] * 399 / 60000), at = (y * 400 + x) * 4;
                if (data[at + 3] > 60 && data[at] > 200 && data[at + 2] < 60) seen++;
              }
              const corner = (390 * 400 + 10) * 4;
              return { seen, corner: data[corner + 3], empty: data[(20 * 400 + 20) * 4 + 3] };
            }
            """);
        Assert.Equal(40, a.GetProperty("seen").GetInt32());
        Assert.True(a.GetProperty("corner").GetInt32() > 100);
        Assert.Equal(0, a.GetProperty("empty").GetInt32());
    }

    [Fact]
    public async Task Names_never_lie_over_each_other()
    {
        var a = await RunAsync("""
            async () => {
              const { placeLabels } = await import("/pairs/labels.js");
              const points = Array.from({ length: 30 }, (_, k) => ({ x: 200 + (k * 37) % 60, y: 200 + (k * 53) % 60, text: "Brindle Estate " + k }));
              const frame = { x: 0, y: 0, w: 500, h: 420 }, placed = placeLabels(points, frame, 15, t => t.length * 7);
              let over = 0;
              for (let i = 0; i < placed.length; i++) for (let j = 0; j < i; j++) {
                const p = placed[i], q = placed[j];
                if (p.x < q.x + q.w && q.x < p.x + p.w && p.y < q.y + q.h && q.y < p.y + p.h) over++;
              }
              return { over, placed: placed.length, inside: placed.every(p => p.x >= 0 && p.x + p.w <= 500) };
            }
            """);
        Assert.Equal(0, a.GetProperty("over").GetInt32());
        Assert.True(a.GetProperty("placed").GetInt32() > 0);
        Assert.True(a.GetProperty("inside").GetBoolean());
    }

    [Theory]
    [InlineData(1000, 2)]
    [InlineData(1000, 3)]
    [InlineData(1000, 4)]
    [InlineData(1000, 7)]
    [InlineData(1000, 8)]
    [InlineData(358, 5)]
    public async Task No_panel_covers_another(int width, int count)
    {
        var a = await RunAsync($$"""
            async () => {
              const { layoutOf } = await import("/pairs/layout.js");
              const l = layoutOf({{width}}, {{count}}), all = [l.large, ...l.panels, ...l.diagonal];
              let over = 0;
              all.forEach((p, i) => all.slice(0, i).forEach(q => { if (p.x < q.x + q.w && q.x < p.x + p.w && p.y < q.y + q.h && q.y < p.y + p.h) over++; }));
              return { over, panels: l.panels.length, inside: all.every(p => p.x >= 0 && p.x + p.w <= l.width + 1 && p.y + p.h <= l.height + 1 && p.w > 20) };
            }
            """);
        Assert.Equal(0, a.GetProperty("over").GetInt32());
        Assert.Equal(count * (count - 1) / 2, a.GetProperty("panels").GetInt32());
        Assert.True(a.GetProperty("inside").GetBoolean());
    }
}
