// Where the panels stand. Small panels fill the triangle below the diagonal; the chosen pair stands large in the free corner above it. With two or three
// readings the corner would be too small, and on a phone there is none: there the large panel comes beside or first.

const GAP = 6;

export function layoutOf(width, count) {
  const phone = width < 560, pad = 0;
  const panels = [], diagonal = [];
  let triangleX = 0, triangleY = 0, cellW, cellH, large, height;
  if (count < 2) {
    cellW = Math.min(width, 560); cellH = cellW * .6;
    return { phone, panels, diagonal: [{ k: 0, x: 0, y: 0, w: cellW - GAP, h: cellH - GAP }], large: null, width, height: cellH };
  }
  if (phone) {
    const tall = Math.round(width * .8);
    large = { x: 0, y: 0, w: width, h: tall };
    triangleY = tall + GAP;
    cellW = width / count; cellH = cellW * .85;
    height = triangleY + cellH * count;
  } else if (count < 4) {
    const side = Math.round(width * (count === 2 ? .36 : .42));
    cellW = side / count; cellH = cellW * .85;
    const w = width - side - 2 * GAP;
    large = { x: side + 2 * GAP, y: 0, w, h: Math.round(Math.min(w * .8, 560)) };
    height = Math.max(large.h, cellH * count);
  } else {
    cellW = width / count; cellH = cellW * .92;
    const first = Math.ceil(count / 2), rows = first;
    large = { x: first * cellW, y: 0, w: (count - first) * cellW, h: rows * cellH - GAP };
    height = cellH * count;
  }
  for (let i = 0; i < count; i++)
    for (let j = 0; j <= i; j++) {
      const box = { x: Math.round(triangleX + j * cellW), y: Math.round(triangleY + i * cellH), w: Math.round(cellW - GAP), h: Math.round(cellH - GAP) };
      if (i === j) diagonal.push({ k: i, ...box });
      else panels.push({ i, j, ...box });
    }
  for (const n of ["x", "y", "w", "h"]) large[n] = Math.round(large[n]);
  return { phone, panels, diagonal, large, width, height: Math.ceil(height + pad) };
}

/** The part of a panel that points may take: room for ticks when large, and a margin for records that miss one of the two readings. */
export function frameOf(panel, large, missing) {
  const left = large ? 52 : 5, bottom = large ? 46 : 5, top = large ? 30 : 5, right = large ? 16 : 5, margin = missing ? (large ? 12 : 6) : 0;
  return {
    x: panel.x + left + margin, y: panel.y + top, w: Math.max(4, panel.w - left - right - margin), h: Math.max(4, panel.h - top - bottom - margin), margin,
  };
}

export function panelAt(layout, x, y) {
  const inside = p => p && x >= p.x && x < p.x + p.w && y >= p.y && y < p.y + p.h;
  if (inside(layout.large)) return { ...layout.large, large: true };
  return layout.panels.find(inside) ?? null;
}
