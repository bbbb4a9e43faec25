// From values to places. A place is 0..TOP along an axis, MISSING without a value; values beyond a frame that was drawn closer stand at its edge.

export const TOP = 60000, MISSING = 65535;

/** Ends of the axis: everything, unless a few values lie so far out that the rest would shrink to a speck; then the bulk with room, and how many lie beyond. */
export function axisOf(values, whole) {
  let min = Infinity, max = -Infinity, known = 0;
  for (let i = 0; i < values.length; i++) {
    const v = values[i];
    if (v !== v) continue;
    known++;
    if (v < min) min = v;
    if (v > max) max = v;
  }
  if (known === 0) return { low: 0, high: 1, known, beyond: 0, min: NaN, max: NaN };
  let low = min, high = max;
  if (!whole && known > 20) {
    const step = Math.max(1, Math.floor(values.length / 20000)), some = [];
    for (let i = 0; i < values.length; i += step) if (values[i] === values[i]) some.push(values[i]);
    some.sort((a, b) => a - b);
    const at = q => some[Math.min(some.length - 1, Math.max(0, Math.round(q * (some.length - 1))))];
    const q1 = at(.01), q3 = at(.99), room = Math.max((q3 - q1) * .3, 1e-300);
    if (q3 > q1) {
      if (max - q3 > (q3 - q1) * .8) high = q3 + room;
      if (q1 - min > (q3 - q1) * .8) low = q1 - room;
      if (min >= 0 && low < 0) low = 0;
    }
  }
  let beyond = 0;
  if (low > min || high < max) for (let i = 0; i < values.length; i++) if (values[i] < low || values[i] > high) beyond++;
  if (low === high) { const half = Math.abs(low) * .05 || 1; low -= half; high += half; }
  return { low, high, known, beyond, min, max };
}

export function placesOf(values, axis) {
  const places = new Uint16Array(values.length), k = TOP / (axis.high - axis.low);
  for (let i = 0; i < values.length; i++) {
    const v = values[i];
    if (v !== v) { places[i] = MISSING; continue; }
    const p = (v - axis.low) * k;
    places[i] = p < 0 ? 0 : p > TOP ? TOP : p + .5;
  }
  return places;
}

/** Round numbers between two ends. */
export function ticksOf(low, high, about) {
  const rough = (high - low) / Math.max(1, about), power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 5, 10].map(m => m * power).find(s => s >= rough * .999);
  const ticks = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + step * 1e-9; k++) ticks.push(k * step || 0);
  return { ticks, decimals: Math.max(0, -Math.floor(Math.log10(step) + 1e-9)) };
}

/** A number for people: grouped, with a true minus. */
export function say(value, decimals) {
  if (value !== value) return "–";
  const text = decimals === undefined
    ? String(+value.toPrecision(7))
    : value.toLocaleString("en", { minimumFractionDigits: decimals, maximumFractionDigits: decimals });
  return (+value === 0 ? text.replace("-", "") : text).replace("-", "−");
}
