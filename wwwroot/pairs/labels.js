// Names beside points, none over another. Points come in order of importance; a name that finds no free place is left out, and its ring remains.

export function placeLabels(points, frame, height, width) {
  const taken = points.map(p => ({ x: p.x - 7, y: p.y - 7, w: 14, h: 14 }));
  const placed = [];
  const free = b => b.x >= frame.x && b.x + b.w <= frame.x + frame.w && b.y >= frame.y - 2 && b.y + b.h <= frame.y + frame.h + 2
    && !placed.some(q => hit(q, b));
  points.forEach((p, k) => {
    const w = width(p.text), h = height;
    const places = [[11, -h / 2], [-11 - w, -h / 2], [-w / 2, -11 - h], [-w / 2, 11], [8, -h - 6], [8, 6], [-w - 8, -h - 6], [-w - 8, 6]];
    for (const [dx, dy] of places) {
      const b = { x: p.x + dx, y: p.y + dy, w, h, text: p.text, point: p };
      if (free(b) && !taken.some((t, i) => i !== k && hit(t, b))) { placed.push(b); return; }
    }
  });
  return placed;
}

const hit = (a, b) => a.x < b.x + b.w && b.x < a.x + a.w && a.y < b.y + b.h && b.y < a.y + a.h;
