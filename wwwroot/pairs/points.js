// Reads the points of a scatter matrix from their binary form: the length of the head (uint32, little-endian), the head as JSON, then typed arrays at
// the places it names. The arrays are views of the buffer: nothing is copied.

const kinds = { float64: Float64Array, float32: Float32Array, uint32: Uint32Array, uint16: Uint16Array, uint8: Uint8Array };

export const NO_COLOUR = 65535;

export function readPoints(buffer) {
  const length = new DataView(buffer).getUint32(0, true);
  const head = JSON.parse(new TextDecoder().decode(new Uint8Array(buffer, 4, length)));
  const points = { count: head.count, readings: head.readings, units: head.units, colour: head.colour, levels: head.levels, values: [], records: null, colours: null, filled: null };
  for (const { name, type, at } of head.arrays) {
    const array = new kinds[type](buffer, 4 + length + at, head.count);
    if (name === "reading") points.values.push(array);
    else points[name] = array;
  }
  return points;
}

/** The row of a record number in rising numbers, or -1. */
export function rowOf(records, number) {
  let low = 0, high = records.length - 1;
  while (low <= high) {
    const mid = (low + high) >> 1;
    if (records[mid] === number) return mid;
    if (records[mid] < number) low = mid + 1;
    else high = mid - 1;
  }
  return -1;
}
