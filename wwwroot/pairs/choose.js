// Which rows a gesture takes. Records that miss a reading of the pair can be taken from the margin, where they are drawn.

import { TOP, MISSING } from "./scales.js";

/** Rows within a rectangle of places (x0..x1, y0..y1 in 0..TOP; a box that reaches into a margin takes what is drawn there). */
export function inBox(px, py, box, into) {
  let count = 0;
  for (let i = 0; i < px.length; i++) {
    const x = px[i], y = py[i];
    const okX = x === MISSING ? box.marginX && y !== MISSING : x >= box.x0 && x <= box.x1;
    const okY = y === MISSING ? box.marginY && x !== MISSING : y >= box.y0 && y <= box.y1;
    if (okX && okY) { into[i] = 1; count++; }
  }
  return count;
}

/** Rows within a closed line of places, by the even-odd rule. */
export function inLasso(px, py, line, into) {
  let left = Infinity, right = -Infinity, low = Infinity, high = -Infinity, count = 0;
  for (const [x, y] of line) { left = Math.min(left, x); right = Math.max(right, x); low = Math.min(low, y); high = Math.max(high, y); }
  for (let i = 0; i < px.length; i++) {
    const x = px[i], y = py[i];
    if (x === MISSING || y === MISSING || x < left || x > right || y < low || y > high) continue;
    let inside = false;
    for (let a = 0, b = line.length - 1; a < line.length; b = a++) {
      const [ax, ay] = line[a], [bx, by] = line[b];
      if ((ay > y) !== (by > y) && x < (bx - ax) * (y - ay) / (by - ay) + ax) inside = !inside;
    }
    if (inside) { into[i] = 1; count++; }
  }
  return count;
}

/** The row nearest to a place, within a distance in pixels; -1 when none is. */
export function nearest(px, py, x, y, frame, within, skip) {
  const kx = frame.w / TOP, ky = frame.h / TOP;
  let best = within * within, row = -1;
  for (let i = 0; i < px.length; i++) {
    if (px[i] === MISSING || py[i] === MISSING || (skip && skip(i))) continue;
    const dx = (px[i] - x) * kx, dy = (py[i] - y) * ky, d = dx * dx + dy * dy;
    if (d < best) { best = d; row = i; }
  }
  return row;
}
