// Puts points on pixels. Few points are drawn one by one with marker and colour; many are counted per pixel, and the count becomes ink: where points
// cover each other the pixel is darker, and every point counts. There is no sample.

import { TOP, MISSING } from "./scales.js";

export const MARKS_UP_TO = 6000, HIDDEN = 255;

const markers = [
  (g, x, y, r) => g.arc(x, y, r, 0, 7),
  (g, x, y, r) => g.rect(x - r * .9, y - r * .9, r * 1.8, r * 1.8),
  (g, x, y, r) => { g.moveTo(x, y - r * 1.25); g.lineTo(x + r * 1.2, y + r * .9); g.lineTo(x - r * 1.2, y + r * .9); g.closePath(); },
  (g, x, y, r) => { g.moveTo(x, y - r * 1.35); g.lineTo(x + r * 1.35, y); g.lineTo(x, y + r * 1.35); g.lineTo(x - r * 1.35, y); g.closePath(); },
  (g, x, y, r) => { g.moveTo(x, y + r * 1.25); g.lineTo(x + r * 1.2, y - r * .9); g.lineTo(x - r * 1.2, y - r * .9); g.closePath(); },
  (g, x, y, r) => { const a = r * .45, b = r * 1.2; g.moveTo(x - a, y - b); g.lineTo(x + a, y - b); g.lineTo(x + a, y - a); g.lineTo(x + b, y - a); g.lineTo(x + b, y + a); g.lineTo(x + a, y + a); g.lineTo(x + a, y + b); g.lineTo(x - a, y + b); g.lineTo(x - a, y + a); g.lineTo(x - b, y + a); g.lineTo(x - b, y - a); g.lineTo(x - a, y - a); g.closePath(); },
];

export function marker(g, kind, x, y, r) {
  g.beginPath();
  markers[kind % markers.length](g, x, y, r);
}

/** One small picture per style, drawn once and then copied. */
function sprite(style, r, ratio) {
  const size = Math.ceil((r * 1.5 + 1) * 2 * ratio), canvas = document.createElement("canvas");
  canvas.width = canvas.height = size;
  const g = canvas.getContext("2d");
  g.scale(ratio, ratio);
  marker(g, style.marker, size / ratio / 2, size / ratio / 2, style.hollow ? r * .9 : r);
  g.globalAlpha = style.alpha;
  if (style.hollow) { g.strokeStyle = style.css; g.lineWidth = 1.4; g.stroke(); }
  else { g.fillStyle = style.css; g.fill(); }
  return { canvas, half: size / ratio / 2, side: size / ratio };
}

/** Points one by one. ids[row] is an index into styles, or HIDDEN; rows are drawn in rising order of layer. */
export function paintMarks(g, frame, px, py, styles, ids, r, ratio) {
  const sprites = styles.map(s => sprite(s, r * (s.size ?? 1), ratio));
  const layers = [...new Set(styles.map(s => s.layer))].sort((a, b) => a - b), n = px.length;
  for (const layer of layers)
    for (let row = 0; row < n; row++) {
      const k = ids[row];
      if (k === HIDDEN || styles[k].layer !== layer) continue;
      const a = px[row], b = py[row];
      if (a === MISSING && b === MISSING) continue;
      const x = a === MISSING ? frame.x - frame.margin / 2 - 1 : frame.x + a / TOP * frame.w;
      const y = b === MISSING ? frame.y + frame.h + frame.margin / 2 + 1 : frame.y + (1 - b / TOP) * frame.h;
      const s = sprites[k];
      g.drawImage(s.canvas, x - s.half, y - s.half, s.side, s.side);
    }
}

let counts = new Uint32Array(0);

/** Counts points per pixel and style, then blends the colours of a pixel by their counts; the logarithm of the count is the ink. */
export function paintDense(g, frame, px, py, styles, ids, stamp, ratio) {
  const x0 = Math.floor((frame.x - frame.margin) * ratio), y0 = Math.floor(frame.y * ratio);
  const w = Math.ceil((frame.w + frame.margin) * ratio) + stamp, h = Math.ceil((frame.h + frame.margin) * ratio) + stamp;
  const m = styles.length, size = w * h * m;
  if (counts.length < size) counts = new Uint32Array(size);
  else counts.fill(0, 0, size);
  const left = Math.round(frame.margin * ratio), fw = frame.w * ratio - 1, fh = frame.h * ratio - 1, kx = fw / TOP, ky = fh / TOP;
  const gapX = Math.max(0, (left >> 1) - 1), gapY = Math.round((frame.h + frame.margin / 2) * ratio), n = px.length;
  for (let row = 0; row < n; row++) {
    const k = ids[row];
    if (k === HIDDEN) continue;
    const a = px[row], b = py[row];
    if (a === MISSING && b === MISSING) continue;
    const x = a === MISSING ? gapX : (left + a * kx) | 0, y = b === MISSING ? gapY : (fh - b * ky) | 0;
    let at = (y * w + x) * m + k;
    counts[at]++;
    if (stamp > 1) { counts[at + m]++; at += w * m; counts[at]++; counts[at + m]++; }
  }
  const image = new ImageData(w, h), data = image.data;
  let most = 1;
  for (let p = 0; p < w * h; p++) {
    let sum = 0;
    for (let k = 0; k < m; k++) sum += counts[p * m + k];
    if (sum > most) most = sum;
  }
  const ink = new Float32Array(Math.min(most, 4096) + 1), full = Math.log(1 + most);
  const inkOf = c => c < ink.length ? ink[c] : Math.log(1 + c) / full;
  for (let c = 1; c < ink.length; c++) ink[c] = Math.log(1 + c) / full;
  const faint = n > 500000 ? .35 : n > 100000 ? .5 : .75;
  for (let p = 0, at = 0, to = 0; p < w * h; p++, to += 4) {
    let sum = 0, red = 0, green = 0, blue = 0, soft = 0;
    for (let k = 0; k < m; k++, at++) {
      const c = counts[at];
      if (c === 0) continue;
      // a style that stands above the rest outweighs what it covers
      const weight = c * (styles[k].weight ?? 1), rgb = styles[k].rgb;
      sum += weight; red += weight * rgb[0]; green += weight * rgb[1]; blue += weight * rgb[2]; soft += c * (styles[k].alpha ?? 1);
    }
    if (sum === 0) continue;
    let raw = 0;
    for (let k = 0; k < m; k++) raw += counts[at - m + k];
    data[to] = red / sum; data[to + 1] = green / sum; data[to + 2] = blue / sum;
    data[to + 3] = 255 * Math.min(1, soft / raw) * (faint + (1 - faint) * inkOf(raw));
  }
  const canvas = document.createElement("canvas");
  canvas.width = w; canvas.height = h;
  canvas.getContext("2d").putImageData(image, 0, 0);
  g.drawImage(canvas, x0 / ratio, y0 / ratio, w / ratio, h / ratio);
}

/** Bars of a histogram: all records in grey, the selected ones in front. */
export function histogramOf(places, bins, selected) {
  const all = new Uint32Array(bins), some = selected ? new Uint32Array(bins) : null, k = bins / (TOP + 1);
  for (let i = 0; i < places.length; i++) {
    const p = places[i];
    if (p === MISSING) continue;
    const b = (p * k) | 0;
    all[b]++;
    if (some && selected[i]) some[b]++;
  }
  return { all, some };
}
