// The scatter matrix of the Pairs page: panels below the diagonal, the chosen pair large, selection linked over all of them. Draws on a canvas from
// typed arrays; tells the page only what was chosen. One instance per element.

import { readPoints, rowOf, NO_COLOUR } from "./points.js";
import { axisOf, placesOf, ticksOf, say, TOP, MISSING } from "./scales.js";
import { layoutOf, frameOf, panelAt } from "./layout.js";
import { paintMarks, paintDense, marker, histogramOf, MARKS_UP_TO, HIDDEN } from "./paint.js";
import { inBox, inLasso, nearest } from "./choose.js";
import { placeLabels } from "./labels.js";

const COLOURED = 6, OTHER = 6, DIM = 7, ESTIMATE = 8, RAISED = 9, PLAIN = 10, TOLD = 500, RINGED = 60, MOST_TOLD = 400;

export function create(host, page) {
  return new Matrix(host, page);
}

class Matrix {
  constructor(host, page) {
    this.host = host;
    this.page = page;
    this.pair = [1, 0];
    this.standouts = [];
    this.correlations = new Map();
    this.hidden = new Set();
    this.raised = -1;
    this.selected = null;
    this.whole = false;
    this.gesture = "box";
    this.version = 0;
    this.build();
    this.resize = new ResizeObserver(() => { if (this.points && Math.abs(this.canvasWidth() - this.drawnWidth) > 1) this.draw(); });
    this.resize.observe(host);
    this.theme = new MutationObserver(() => this.points && this.draw());
    for (const e of [document.documentElement, document.body]) this.theme.observe(e, { attributes: true, attributeFilter: ["class", "data-theme", "style"] });
    this.scheme = matchMedia("(prefers-color-scheme: dark)");
    this.schemeChanged = () => this.points && this.draw();
    this.scheme.addEventListener("change", this.schemeChanged);
  }

  dispose() {
    this.version++;
    this.resize.disconnect();
    this.theme.disconnect();
    this.scheme.removeEventListener("change", this.schemeChanged);
    this.stop?.abort();
    this.host.replaceChildren();
    this.points = null;
  }

  // ---- data

  /** Fetches the points and draws them; gives their number and how long drawing took, or what went wrong. */
  async load(address, question) {
    this.stop?.abort();
    const stop = this.stop = new AbortController();
    this.host.setAttribute("aria-busy", "true");
    try {
      const response = await fetch(address, { method: "POST", headers: { "Content-Type": "application/json" }, body: question, signal: stop.signal });
      if (!response.ok) {
        const problem = await response.json().catch(() => null);
        return { count: 0, milliseconds: 0, problem: problem?.detail ?? `The points could not be loaded (${response.status}).` };
      }
      const buffer = await response.arrayBuffer();
      const began = performance.now();
      this.show(readPoints(buffer));
      await this.drawn;
      return { count: this.points.count, milliseconds: performance.now() - began, problem: null };
    } catch (e) {
      return { count: 0, milliseconds: 0, problem: e.name === "AbortError" ? null : "The points could not be loaded: the portal did not answer." };
    } finally {
      if (this.stop === stop) this.host.removeAttribute("aria-busy");
    }
  }

  show(points) {
    const same = this.points && this.points.readings.join("\n") === points.readings.join("\n");
    this.points = points;
    this.selected = null;
    this.hidden.clear();
    this.raised = -1;
    if (!same) this.pair = points.readings.length > 1 ? [1, 0] : [0, 0];
    this.measure();
    this.sizeGroups();
    this.fillKey();
    this.fillRanges();
    this.draw();
  }

  measure() {
    this.axes = this.points.values.map(v => axisOf(v, this.whole));
    this.places = this.points.values.map((v, k) => placesOf(v, this.axes[k]));
    this.missing = this.points.values.some((_, k) => this.axes[k].known < this.points.count);
    this.sayFrame();
  }

  /** What the frame leaves at its edge, and how many rings there are. */
  sayFrame() {
    const beyond = new Set();
    this.axes.forEach((axis, k) => axis.beyond && beyond.add(`${axis.beyond.toLocaleString("en")} of ${this.points.readings[k]}`));
    this.closer.hidden = !this.whole && beyond.size === 0;
    this.closer.textContent = this.whole ? "Look closer" : "Show everything";
    this.beyond.textContent = (this.standouts.length > RINGED ? `Ringed: the farthest ${RINGED} of ${this.standouts.length.toLocaleString("en")}${this.standouts.length >= MOST_TOLD ? " or more" : ""}. ` : "") + (beyond.size ? `Far values stand at the edge of the frame: ${[...beyond].join(", ")}. ` : "");
  }

  /** The most frequent levels get colour and marker; the rest is grey. */
  sizeGroups() {
    const { levels, colours } = this.points, sizes = new Uint32Array(levels.length);
    this.uncoloured = 0;
    if (colours) for (let i = 0; i < colours.length; i++) if (colours[i] === NO_COLOUR) this.uncoloured++; else sizes[colours[i]]++;
    const order = [...levels.keys()], kept = levels.length <= COLOURED ? order : order.sort((a, b) => sizes[b] - sizes[a]).slice(0, COLOURED).sort((a, b) => a - b);
    this.styleOfLevel = new Uint8Array(levels.length).fill(OTHER);
    kept.forEach((level, k) => { this.styleOfLevel[level] = k; });
    this.sizes = sizes;
  }

  setStandouts(list) {
    this.standouts = list;
    if (!this.points) return;
    this.sayFrame();
    this.draw();
  }

  setCorrelations(list) {
    this.correlations = new Map(list.map(c => [`${c.a}\n${c.b}`, c.rank]));
    if (this.points) this.draw();
  }

  correlation(i, j) {
    const r = this.points.readings, c = this.correlations;
    return c.get(`${r[j]}\n${r[i]}`) ?? c.get(`${r[i]}\n${r[j]}`);
  }

  // ---- the elements around the picture

  build() {
    const make = (tag, set, ...inside) => { const e = document.createElement(tag); Object.assign(e, set); e.append(...inside); return e; };
    this.key = make("div", { className: "pairs-key" });
    this.key.setAttribute("role", "group");
    this.key.setAttribute("aria-label", "Colours");
    this.canvas = make("canvas", { className: "pairs-canvas" });
    this.canvas.setAttribute("aria-hidden", "true");
    this.canvas.dataset.picture = "matrix";
    this.over = make("canvas", { className: "pairs-over" });
    this.over.tabIndex = 0;
    this.over.setAttribute("role", "application");
    this.over.setAttribute("aria-roledescription", "scatter matrix");
    this.tip = make("div", { className: "pairs-tip", hidden: true });
    this.said = make("div", { className: "pairs-said" });
    this.said.setAttribute("aria-live", "polite");
    this.stage = make("div", { className: "pairs-stage" }, this.canvas, this.over, this.tip);
    this.beyond = make("span", {});
    this.closer = make("button", { type: "button", className: "quiet", hidden: true, onclick: () => { this.whole = !this.whole; this.measure(); this.draw(); } });
    this.gestures = make("div", { className: "pairs-gestures" });
    this.gestures.setAttribute("role", "group");
    this.gestures.setAttribute("aria-label", "Select by");
    for (const [kind, text] of [["box", "Box"], ["lasso", "Lasso"]]) {
      const b = make("button", { type: "button", textContent: text, className: "chip", onclick: () => { this.gesture = kind; this.markGesture(); } });
      b.dataset.kind = kind;
      this.gestures.append(b);
    }
    this.clear = make("button", { type: "button", className: "quiet", textContent: "Clear selection", hidden: true, onclick: () => this.clearSelection() });
    this.ranges = make("details", { className: "pairs-ranges" }, make("summary", { textContent: "Select by range" }));
    this.rangeForm = make("div", { className: "pairs-range" });
    this.ranges.append(this.rangeForm);
    this.host.replaceChildren(this.key, this.stage, make("div", { className: "pairs-tools" }, this.gestures, this.clear, this.beyond, this.closer), this.ranges, this.said);
    this.markGesture();
    this.listen();
  }

  markGesture() {
    for (const b of this.gestures.children) b.setAttribute("aria-pressed", String(b.dataset.kind === this.gesture));
  }

  fillKey() {
    const { levels, colour } = this.points, most = 14;
    this.key.replaceChildren();
    const shown = [...levels.keys()].sort((a, b) => (this.styleOfLevel[a] === OTHER) - (this.styleOfLevel[b] === OTHER) || a - b).slice(0, most);
    for (const level of shown) {
      const b = document.createElement("button"), swatch = document.createElement("canvas");
      b.type = "button";
      swatch.width = swatch.height = 28;
      swatch.className = "pairs-swatch";
      swatch.dataset.level = level;
      b.append(swatch, levels[level]);
      b.setAttribute("aria-pressed", "true");
      b.title = `${this.sizes[level].toLocaleString("en")} records; click to hide or show`;
      const raise = on => { const next = on ? level : -1; if (this.raised !== next) { this.raised = next; this.draw(); } };
      b.addEventListener("pointerenter", () => raise(true));
      b.addEventListener("pointerleave", () => raise(false));
      b.addEventListener("focus", () => b.matches(":focus-visible") && raise(true));
      b.addEventListener("blur", () => raise(false));
      b.addEventListener("click", () => {
        if (!this.hidden.delete(level)) this.hidden.add(level);
        b.setAttribute("aria-pressed", String(!this.hidden.has(level)));
        this.draw();
      });
      this.key.append(b);
    }
    const note = text => { const s = document.createElement("span"); s.textContent = text; this.key.append(s); };
    if (levels.length > most) note(`and ${levels.length - most} more of ${colour}, grey`);
    if (this.uncoloured) note(`${this.uncoloured.toLocaleString("en")} without ${colour}, grey`);
    if (this.points.filled) note("hollow: estimate");
  }

  paintKey(styles) {
    for (const swatch of this.key.querySelectorAll("canvas")) {
      const g = swatch.getContext("2d"), style = styles[this.styleOfLevel[swatch.dataset.level]];
      g.clearRect(0, 0, 28, 28);
      marker(g, style.marker, 14, 14, 9);
      g.fillStyle = style.css;
      g.fill();
    }
  }

  fillRanges() {
    const make = (tag, set, ...inside) => { const e = document.createElement(tag); Object.assign(e, set); e.append(...inside); return e; };
    const { readings } = this.points;
    const pick = make("select", {}, ...readings.map((name, k) => make("option", { value: k, textContent: name })));
    const from = make("input", { type: "number", step: "any" }), to = make("input", { type: "number", step: "any" });
    // a label around a list of choices would read all of them out
    for (const [e, name] of [[pick, "Reading of the range"], [from, "Range from"], [to, "Range to"]]) e.setAttribute("aria-label", name);
    const hint = () => { const a = this.axes[pick.value]; from.placeholder = say(a.min); to.placeholder = say(a.max); };
    pick.addEventListener("change", hint);
    hint();
    const choose = add => this.selectRange(+pick.value, from.value === "" ? -Infinity : +from.value, to.value === "" ? Infinity : +to.value, add);
    this.rangeForm.replaceChildren(
      make("label", { textContent: "Reading " }, pick), make("label", { textContent: "from " }, from), make("label", { textContent: "to " }, to),
      make("button", { type: "button", className: "chip", textContent: "Select", onclick: () => choose(false) }),
      make("button", { type: "button", className: "chip", textContent: "Select within selection", onclick: () => choose(true) }));
  }

  // ---- drawing

  canvasWidth() {
    return Math.max(240, Math.floor(this.stage.clientWidth || this.host.clientWidth));
  }

  styles() {
    const css = getComputedStyle(this.host), value = n => css.getPropertyValue(n).trim();
    const of = (name, more) => { const text = value(name) || "#5b6670"; return { css: text, rgb: rgbOf(text), marker: 0, alpha: .6, layer: 1, ...more }; };
    const list = [];
    for (let k = 0; k < COLOURED; k++) list.push(of(`--g${k + 1}`, { marker: k }));
    list[OTHER] = of("--g8", { alpha: .45, layer: 0 });
    list[DIM] = of("--ink-3", { alpha: .22, layer: 0, weight: .15 });
    list[ESTIMATE] = of("--estimate", { hollow: true, alpha: .9, layer: 2 });
    list[RAISED] = of("--accent", { alpha: .9, layer: 3, weight: 40 });
    list[PLAIN] = of("--g1", {});
    this.colour = { line: value("--line") || "#ccc", grid: value("--grid") || "#eee", ink: value("--ink") || "#111", ink2: value("--ink-2") || "#444", ink3: value("--ink-3") || "#777", accent: value("--accent") || "#0b5d6b", standOut: value("--stand-out") || "#b3401a", sheet: value("--sheet") || "#fff" };
    this.font = css.fontFamily || "sans-serif";
    return list;
  }

  ids() {
    const { count, colours } = this.points, ids = new Uint8Array(count), s = this.selected, raised = this.raised, of = this.styleOfLevel, hide = new Uint8Array(of.length);
    for (const level of this.hidden) hide[level] = 1;
    for (let i = 0; i < count; i++) {
      const c = colours ? colours[i] : NO_COLOUR;
      if (c !== NO_COLOUR && hide[c]) ids[i] = HIDDEN;
      else if (s && !s[i]) ids[i] = DIM;
      else if (raised >= 0) ids[i] = c === raised ? (of[c] === OTHER ? RAISED : of[c]) : DIM;
      else ids[i] = c === NO_COLOUR ? (colours ? OTHER : PLAIN) : of[c];
    }
    return ids;
  }

  /** Draws large panel first; with many points it lets the page breathe between panels, and gives up when something newer is to be drawn. */
  draw() {
    const version = ++this.version;
    this.drawn = this.drawAll(version);
    return this.drawn;
  }

  async drawAll(version) {
    const width = this.canvasWidth(), layout = this.layout = layoutOf(width, this.points.readings.length), ratio = this.ratio = Math.min(3, window.devicePixelRatio || 1);
    this.drawnWidth = width;
    const styles = this.styles(), ids = this.ids();
    // the old picture stays until the new one is complete
    const next = document.createElement("canvas");
    next.width = Math.round(width * ratio); next.height = Math.round(layout.height * ratio);
    const g = next.getContext("2d");
    g.scale(ratio, ratio);
    g.fillStyle = this.colour.sheet;
    g.fillRect(0, 0, width, layout.height);
    this.paintKey(styles);
    const work = [];
    if (layout.large) work.push(() => this.drawPanel(g, { i: this.pair[0], j: this.pair[1], ...layout.large }, true, styles, ids));
    for (const d of layout.diagonal) work.push(() => this.drawDiagonal(g, d));
    for (const p of layout.panels) work.push(() => this.drawPanel(g, p, false, styles, ids));
    let began = performance.now();
    for (const step of work) {
      step();
      if (performance.now() - began > 24 && this.points.count > MARKS_UP_TO) {
        await new Promise(next => setTimeout(next));
        if (version !== this.version) return;
        began = performance.now();
      }
    }
    for (const c of [this.canvas, this.over]) {
      c.width = next.width; c.height = next.height;
      c.style.width = width + "px"; c.style.height = layout.height + "px";
    }
    this.stage.style.height = layout.height + "px";
    this.canvas.getContext("2d").drawImage(next, 0, 0);
    this.describe();
    this.drawOver();
  }

  idsFor(ids, i, j) {
    const { filled } = this.points;
    if (!filled) return ids;
    const mask = 1 << i | 1 << j, own = ids.slice();
    for (let row = 0; row < own.length; row++) if (filled[row] & mask && own[row] !== HIDDEN && own[row] !== DIM) own[row] = ESTIMATE;
    return own;
  }

  drawPanel(g, p, large, styles, ids) {
    const { i, j } = p, { count, readings, units } = this.points, frame = frameOf(p, large, this.missing), c = this.colour;
    const chosen = !large && i === this.pair[0] && j === this.pair[1];
    if (large) this.drawAxes(g, frame, i, j);
    const own = this.idsFor(ids, i, j), px = this.places[j], py = this.places[i];
    g.save();
    g.beginPath(); g.rect(p.x, p.y, p.w, p.h); g.clip();
    if (count <= MARKS_UP_TO) paintMarks(g, frame, px, py, styles, own, large ? 3.4 : count > 1500 ? 1.7 : 2.2, this.ratio);
    else paintDense(g, frame, px, py, styles, own, count <= 60000 || (large && count < 250000) ? 2 : 1, this.ratio);
    g.restore();
    g.strokeStyle = large || chosen ? c.accent : c.line;
    g.lineWidth = large || chosen ? 2 : 1;
    g.strokeRect(p.x + (large || chosen ? 1 : .5), p.y + (large || chosen ? 1 : .5), p.w - (large || chosen ? 2 : 1), p.h - (large || chosen ? 2 : 1));
    this.drawRings(g, frame, i, j, large);
    const r = this.correlation(i, j), text = r === undefined || r === null ? "" : r.toFixed(2).replace("-", "−");
    g.fillStyle = c.ink2;
    g.textBaseline = "alphabetic";
    if (large) {
      g.font = `400 13px ${this.font}`;
      const title = k => readings[k] + (units[k] ? `, ${units[k]}` : "");
      g.textAlign = "right";
      g.fillText(fit(g, title(j) + " →", frame.w), frame.x + frame.w, p.y + p.h - 9);
      g.textAlign = "left";
      g.fillText(fit(g, `↑ ${title(i)}${text ? `   rank correlation ${text}` : ""}`, p.w - 24), p.x + 12, p.y + 19);
    } else if (text && p.w > 64 && p.h > 48) {
      g.font = `400 12px ${this.font}`;
      g.textAlign = "left";
      const w = g.measureText(text).width;
      g.globalAlpha = .8; g.fillStyle = c.sheet; g.fillRect(p.x + 4, p.y + 4, w + 6, 16); g.globalAlpha = 1;
      g.fillStyle = c.ink2;
      g.fillText(text, p.x + 7, p.y + 16);
    }
  }

  drawAxes(g, frame, i, j) {
    const c = this.colour;
    g.font = `400 12px ${this.font}`;
    g.fillStyle = c.ink3;
    g.strokeStyle = c.grid;
    g.lineWidth = 1;
    const x = this.axes[j], y = this.axes[i];
    const tx = ticksOf(x.low, x.high, Math.max(2, Math.floor(frame.w / 60))), ty = ticksOf(y.low, y.high, Math.max(2, Math.floor(frame.h / 40)));
    g.textAlign = "right"; g.textBaseline = "middle";
    for (const t of ty.ticks) {
      const at = frame.y + (1 - (t - y.low) / (y.high - y.low)) * frame.h;
      g.beginPath(); g.moveTo(frame.x - frame.margin, Math.round(at) + .5); g.lineTo(frame.x + frame.w, Math.round(at) + .5); g.stroke();
      g.fillText(short(t, ty.decimals), frame.x - frame.margin - 6, at);
    }
    g.textAlign = "center"; g.textBaseline = "top";
    for (const t of tx.ticks) {
      const at = frame.x + (t - x.low) / (x.high - x.low) * frame.w;
      g.fillText(short(t, tx.decimals), at, frame.y + frame.h + frame.margin + 5);
    }
  }

  drawRings(g, frame, i, j, large) {
    const c = this.colour, points = [];
    // only the farthest: with more, the rings would hide what they point at
    for (const s of this.standouts.slice(0, RINGED)) {
      const row = rowOf(this.points.records, s.record);
      if (row < 0 || (this.points.colours && this.hidden.has(this.points.colours[row]))) continue;
      const a = this.places[j][row], b = this.places[i][row];
      if (a === MISSING || b === MISSING) continue;
      points.push({ x: frame.x + a / TOP * frame.w, y: frame.y + (1 - b / TOP) * frame.h, text: s.label, record: s.record });
    }
    g.strokeStyle = c.standOut;
    g.lineWidth = large ? 1.8 : 1.2;
    const many = points.length > 25;
    for (const p of points) { g.beginPath(); g.arc(p.x, p.y, large ? (many ? 5.5 : 6.5) : (many ? 2.8 : 4), 0, 7); g.stroke(); }
    if (!large) return;
    g.font = `600 13px ${this.font}`;
    g.textBaseline = "middle"; g.textAlign = "left";
    // a vehicle with many runs is named once
    const named = new Set(), first = points.filter(p => !named.has(p.text) && named.add(p.text)).slice(0, 14);
    for (const b of placeLabels(first, frame, 15, t => g.measureText(t).width)) {
      g.lineWidth = 3.5; g.strokeStyle = c.sheet; g.lineJoin = "round";
      g.strokeText(b.text, b.x, b.y + b.h / 2);
      g.fillStyle = c.standOut;
      g.fillText(b.text, b.x, b.y + b.h / 2);
    }
  }

  drawDiagonal(g, d) {
    const c = this.colour, bins = Math.max(8, Math.min(32, Math.floor(d.w / 6))), { all, some } = histogramOf(this.places[d.k], bins, this.selected);
    const most = Math.max(1, ...all), head = d.h > 70 ? 40 : 24, left = 6, w = (d.w - 2 * left) / bins, room = d.h - head - 8;
    g.strokeStyle = c.line; g.lineWidth = 1;
    g.strokeRect(d.x + .5, d.y + .5, d.w - 1, d.h - 1);
    for (let b = 0; b < bins; b++) {
      const bar = (n, colour) => { const h = n === 0 ? 0 : Math.max(1, n / most * room); g.fillStyle = colour; g.fillRect(d.x + left + b * w, d.y + d.h - 5 - h, Math.max(1, w - 1), h); };
      bar(all[b], c.line);
      if (some) bar(some[b], c.accent);
    }
    g.fillStyle = c.ink;
    g.textAlign = "left"; g.textBaseline = "alphabetic";
    g.font = `600 ${d.w < 110 ? 12 : 14}px ${this.font}`;
    g.fillText(fit(g, this.points.readings[d.k], d.w - 14), d.x + 8, d.y + 18);
    const unit = this.points.units[d.k], missing = this.points.count - this.axes[d.k].known, lines = [];
    if (unit && d.w >= 84) lines.push(unit);
    if (missing) lines.push(`${missing.toLocaleString("en")} missing`);
    g.font = `400 12px ${this.font}`;
    g.fillStyle = c.ink2;
    if (d.h > 70 && lines.length) g.fillText(fit(g, lines.join(" · "), d.w - 14), d.x + 8, d.y + 33);
  }

  describe() {
    const { readings, count } = this.points, [i, j] = this.pair, r = this.correlation(i, j);
    this.over.setAttribute("aria-label", readings.length < 2 ? `${readings[0]}, ${count} records`
      : `${readings[i]} against ${readings[j]}, ${count} records${r == null ? "" : `, rank correlation ${r.toFixed(2)}`}${this.selected ? `, ${this.selectedCount} selected` : ""}. Arrow keys choose the pair, Enter the record that stands farthest off, Escape clears the selection.`);
  }

  /** Hover, gesture and keyboard focus go on their own canvas, so that they never draw the points again. */
  drawOver() {
    const g = this.over.getContext("2d");
    g.setTransform(this.ratio, 0, 0, this.ratio, 0, 0);
    g.clearRect(0, 0, this.over.width, this.over.height);
    const c = this.colour;
    if (this.line?.length > 1) {
      g.strokeStyle = c.accent; g.fillStyle = c.accent; g.lineWidth = 1.5;
      g.beginPath();
      if (this.gesture === "box") { const [[ax, ay]] = this.line, [bx, by] = this.line.at(-1); g.rect(ax, ay, bx - ax, by - ay); }
      else { this.line.forEach(([x, y], k) => k ? g.lineTo(x, y) : g.moveTo(x, y)); g.closePath(); }
      g.globalAlpha = .12; g.fill(); g.globalAlpha = 1; g.stroke();
    }
    if (this.hover) {
      const row = this.hover.row;
      const mark = (p, large) => {
        const f = frameOf(p, large, this.missing), a = this.places[p.j][row], b = this.places[p.i][row];
        if (a === MISSING || b === MISSING) return;
        g.strokeStyle = c.ink; g.lineWidth = 2;
        g.beginPath(); g.arc(f.x + a / TOP * f.w, f.y + (1 - b / TOP) * f.h, large ? 6 : 4, 0, 7); g.stroke();
      };
      for (const p of this.layout.panels) mark(p, false);
      mark({ i: this.pair[0], j: this.pair[1], ...this.layout.large }, true);
    }
  }

  // ---- gestures

  listen() {
    const at = e => { const r = this.over.getBoundingClientRect(); return [e.clientX - r.left, e.clientY - r.top]; };
    this.over.addEventListener("pointerdown", e => {
      if (!this.points || e.button !== 0) return;
      const [x, y] = at(e), panel = panelAt(this.layout, x, y);
      if (!panel) return;
      this.down = { panel: panel.large ? { i: this.pair[0], j: this.pair[1], ...panel } : panel, add: e.shiftKey };
      this.line = [[x, y]];
      this.over.setPointerCapture(e.pointerId);
    });
    this.over.addEventListener("pointermove", e => {
      if (!this.points) return;
      const [x, y] = at(e);
      if (this.down) {
        const p = this.down.panel, last = this.line.at(-1), cx = Math.min(p.x + p.w, Math.max(p.x, x)), cy = Math.min(p.y + p.h, Math.max(p.y, y));
        if (Math.hypot(cx - last[0], cy - last[1]) > 2) { this.line.push([cx, cy]); this.later(() => this.drawOver()); }
        return;
      }
      this.later(() => this.pointAt(x, y));
    });
    this.over.addEventListener("pointerup", e => {
      if (!this.down) return;
      const { panel, add } = this.down, line = this.line, moved = line.length > 1 && (this.gesture === "lasso" || Math.hypot(line.at(-1)[0] - line[0][0], line.at(-1)[1] - line[0][1]) > 4);
      this.down = this.line = null;
      if (moved) this.take(panel, line, add);
      else this.click(panel, ...at(e));
      this.drawOver();
    });
    this.over.addEventListener("pointercancel", () => { this.down = this.line = null; this.drawOver(); });
    this.over.addEventListener("pointerleave", () => { if (!this.down) { this.later(null); this.leave(); } });
    this.over.addEventListener("keydown", e => this.press(e));
  }

  later(what) {
    this.wanted = what;
    if (this.frame) return;
    this.frame = requestAnimationFrame(() => { this.frame = 0; const w = this.wanted; this.wanted = null; if (this.points) w?.(); });
  }

  place(panel, x, y) {
    const f = frameOf(panel, !!panel.large, this.missing);
    return [(x - f.x) / f.w * TOP, (1 - (y - f.y) / f.h) * TOP, f];
  }

  rowAt(panel, x, y) {
    const [a, b, f] = this.place(panel, x, y), colours = this.points.colours;
    return nearest(this.places[panel.j], this.places[panel.i], a, b, f, 9, this.hidden.size && colours ? row => this.hidden.has(colours[row]) : null);
  }

  pointAt(x, y) {
    const found = panelAt(this.layout, x, y);
    if (!found) return this.leave();
    const panel = found.large ? { i: this.pair[0], j: this.pair[1], ...found } : found, row = this.rowAt(panel, x, y);
    this.over.style.cursor = row >= 0 && found.large ? "pointer" : "crosshair";
    if (row < 0) return this.leave();
    if (this.hover?.row === row) return;
    this.hover = { row };
    const { records, readings, units, values, levels, colours, colour, filled } = this.points, label = this.standouts.find(s => s.record === records[row])?.label;
    const lines = [`${label && label !== `record ${records[row]}` ? `${label}, record` : "Record"} ${records[row]}`];
    for (const k of [panel.j, panel.i]) lines.push(`${readings[k]}: ${filled && filled[row] >> k & 1 ? "≈ " : ""}${say(values[k][row])}${units[k] ? " " + units[k] : ""}`);
    if (colours && colours[row] !== NO_COLOUR) lines.push(`${colour}: ${levels[colours[row]]}`);
    this.tip.replaceChildren(...lines.map((t, k) => { const d = document.createElement(k ? "div" : "b"); d.textContent = t; return d; }));
    this.tip.hidden = false;
    const w = this.tip.offsetWidth, h = this.tip.offsetHeight;
    this.tip.style.left = Math.max(0, Math.min(this.layout.width - w, x + 16 + w > this.layout.width ? x - w - 12 : x + 16)) + "px";
    this.tip.style.top = Math.max(0, y + 16 + h > this.layout.height ? y - h - 12 : y + 16) + "px";
    this.drawOver();
  }

  leave() {
    if (!this.hover && this.tip.hidden) return;
    this.hover = null;
    this.tip.hidden = true;
    this.drawOver();
  }

  click(panel, x, y) {
    if (!panel.large) return this.choosePair(panel.i, panel.j);
    const row = this.rowAt(panel, x, y);
    if (row >= 0) this.page?.invokeMethodAsync("OpenRecord", this.points.records[row]);
  }

  press(e) {
    if (!this.points) return;
    let [i, j] = this.pair;
    const last = this.points.readings.length - 1;
    if (e.key === "ArrowLeft") j--;
    else if (e.key === "ArrowRight") j++;
    else if (e.key === "ArrowUp") i--;
    else if (e.key === "ArrowDown") i++;
    else if (e.key === "Escape") { this.clearSelection(); return; }
    else if (e.key === "Enter" && this.standouts.length) { this.page?.invokeMethodAsync("OpenRecord", this.standouts[0].record); return; }
    else return;
    e.preventDefault();
    if (j < 0 || i > last || j >= i) return;
    this.choosePair(i, j);
  }

  choosePair(i, j) {
    if (!this.points || i <= j || i >= this.points.readings.length) return;
    this.pair = [i, j];
    this.draw();
    const r = this.correlation(i, j);
    this.said.textContent = `${this.points.readings[i]} against ${this.points.readings[j]}${r == null ? "" : `, rank correlation ${r.toFixed(2)}`}`;
    this.page?.invokeMethodAsync("PairChosen", this.points.readings[i], this.points.readings[j]);
  }

  // ---- selection

  take(panel, line, add) {
    const into = new Uint8Array(this.points.count), px = this.places[panel.j], py = this.places[panel.i];
    let conditions = null;
    if (this.gesture === "box") {
      const [ax, ay, f] = this.place(panel, ...line[0]), [bx, by] = this.place(panel, ...line.at(-1));
      const x0 = Math.min(ax, bx), x1 = Math.max(ax, bx), y0 = Math.min(ay, by), y1 = Math.max(ay, by);
      const marginX = f.margin > 0 && x0 < 0, marginY = f.margin > 0 && y0 < 0;
      inBox(px, py, { x0, x1, y0, y1, marginX, marginY }, into);
      if (!marginX && !marginY) conditions = [this.condition(panel.j, x0, x1), this.condition(panel.i, y0, y1)];
    } else inLasso(px, py, line.map(q => this.place(panel, ...q).slice(0, 2)), into);
    this.keep(into, add ? "or" : null, conditions);
  }

  /** The range of values that two places stand for; open where the frame was drawn closer and the gesture reached its edge. */
  condition(k, from, to) {
    const a = this.axes[k], v = p => a.low + p / TOP * (a.high - a.low);
    return { column: this.points.readings[k], from: from <= 0 ? null : v(from - .5), to: to >= TOP ? null : v(to + .5) };
  }

  selectRange(k, from, to, within) {
    const into = new Uint8Array(this.points.count), values = this.points.values[k];
    for (let i = 0; i < into.length; i++) if (values[i] >= from && values[i] <= to) into[i] = 1;
    this.keep(into, within ? "and" : null, [{ column: this.points.readings[k], from: Number.isFinite(from) ? from : null, to: Number.isFinite(to) ? to : null }]);
  }

  selectRecords(numbers) {
    if (!this.points) return;
    const into = new Uint8Array(this.points.count);
    for (const n of numbers) { const row = rowOf(this.points.records, n); if (row >= 0) into[row] = 1; }
    this.keep(into, null, null);
  }

  clearSelection() {
    if (!this.selected) return;
    this.selected = null;
    this.finishSelection(null);
  }

  keep(into, how, conditions) {
    const { colours } = this.points, before = this.selected;
    if (this.hidden.size && colours) for (let i = 0; i < into.length; i++) if (into[i] && this.hidden.has(colours[i])) { into[i] = 0; conditions = null; }
    if (before && how === "or") { for (let i = 0; i < into.length; i++) into[i] |= before[i]; conditions = null; }
    if (before && how === "and") { for (let i = 0; i < into.length; i++) into[i] &= before[i]; conditions = conditions && this.conditions ? [...this.conditions, ...conditions] : null; }
    this.selected = into;
    this.finishSelection(conditions);
  }

  finishSelection(conditions) {
    const { records, colours, levels } = this.points, s = this.selected, told = [], groups = new Uint32Array(levels.length);
    let count = 0;
    if (s) for (let i = 0; i < s.length; i++) if (s[i]) {
      if (told.length < TOLD) told.push(records[i]);
      if (colours && colours[i] !== NO_COLOUR) groups[colours[i]]++;
      count++;
    }
    if (s && count === 0) this.selected = null;
    this.selectedCount = count;
    this.conditions = count ? conditions : null;
    this.clear.hidden = count === 0;
    this.said.textContent = count ? `${count.toLocaleString("en")} of ${this.points.count.toLocaleString("en")} records selected` : "Nothing selected";
    this.draw();
    this.page?.invokeMethodAsync("SelectionChanged", {
      count, total: this.points.count, records: told, conditions: this.conditions,
      groups: [...groups.keys()].filter(k => groups[k]).sort((a, b) => groups[b] - groups[a]).slice(0, 20).map(k => ({ level: levels[k], count: groups[k] })),
    });
  }

  // ---- taking it along

  async picture() {
    await this.drawn;
    return new Promise(done => this.canvas.toBlob(done, "image/png"));
  }

  /** The picture as bytes, for a pinned result. */
  async pngBytes() {
    return new Uint8Array(await (await this.picture()).arrayBuffer());
  }
}

function rgbOf(css) {
  const hex = /^#([0-9a-f]{6})$/i.exec(css);
  if (hex) return [0, 2, 4].map(k => parseInt(hex[1].slice(k, k + 2), 16));
  const parts = css.match(/[\d.]+/g);
  return parts && parts.length >= 3 ? parts.slice(0, 3).map(Number) : [91, 102, 112];
}

function fit(g, text, width) {
  if (g.measureText(text).width <= width) return text;
  let n = text.length - 1;
  while (n > 1 && g.measureText(text.slice(0, n) + "…").width > width) n--;
  return text.slice(0, n) + "…";
}

function short(value, decimals) {
  const size = Math.abs(value);
  return size >= 1e6 || (size > 0 && size < 1e-4) ? value.toExponential(1).replace("-", "−") : say(value, Math.min(decimals, 6));
}
