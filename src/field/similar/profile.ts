import type { PixelGrid } from "./problem.ts";
import type { StretchedAxis } from "./stretched-axis.ts";
import type { Whitened } from "./whitened.ts";

/** A round picture from values at the points of the radius: cubic interpolation, zero beyond. */
export function fillRound(
  values: Float64Array,
  axis: StretchedAxis,
  width: number,
  { x0, y0, pixel, width: columns, height }: PixelGrid,
  out: Float64Array,
): void {
  const table = mirrored(values);
  const c2 = axis.stretch;
  const [perStep2, last] = [c2 / axis.step ** 2, axis.count - 2];
  const perC2 = 2 / (c2 * width * width);
  let at = 0;
  for (let j = 0; j < height; j++) {
    const y2 = (y0 + j * pixel) ** 2;
    for (let i = 0; i < columns; i++) {
      const x = x0 + i * pixel;
      const u = Math.sqrt(perStep2 * (Math.sqrt(1 + perC2 * (x * x + y2)) - 1));
      out[at++] = u < last ? Math.max(cubic(table, u), 0) : 0;
    }
  }
}

/** The same along one axis. */
export function fillStrip(
  values: Float64Array,
  axis: StretchedAxis,
  width: number,
  { x0, pixel, width: columns }: PixelGrid,
  out: Float64Array,
): void {
  fillRound(values, axis, width, { x0, y0: 0, pixel, width: columns, height: 1 }, out);
}

/** Value at point −1 first. */
function mirrored(values: Float64Array): Float64Array {
  const table = new Float64Array(values.length + 1);
  table.set(values, 1);
  table[0] = values[1]!;
  return table;
}

/** Through four points, Lagrange's form. */
function cubic(table: Float64Array, u: number): number {
  const i = u | 0;
  const f = u - i;
  const g = f - 1;
  const h = f - 2;
  const e = f + 1;
  return (
    (-f * g * h * table[i]! + f * g * e * table[i + 3]!) / 6 +
    (e * g * h * table[i + 1]! - e * f * h * table[i + 2]!) / 2
  );
}

/** Logarithms stop here, relative to the peak. */
const FLOOR = 1e-11;

/** Logarithms on the quarters x₁x₂ > 0 and x₁x₂ < 0. */
export type QuarterTables = readonly [same: Float64Array, opposite: Float64Array];

/** Tables with a row and a column before the first, which belong to the other quarter. */
export function logQuarters(
  values: Float64Array,
  rows: number,
  columns: number,
  quarters: 1 | 2,
): QuarterTables {
  const same = logTable(values, 0, rows, columns);
  if (quarters === 1) {
    addBorder(same, same, rows, columns);
    return [same, same];
  }
  const opposite = logTable(values, rows * columns, rows, columns);
  addBorder(same, opposite, rows, columns);
  addBorder(opposite, same, rows, columns);
  return [same, opposite];
}

function logTable(values: Float64Array, first: number, rows: number, columns: number): Float64Array {
  const wide = columns + 1;
  const table = new Float64Array((rows + 1) * wide);
  const floor = FLOOR * values[0]!;
  const lowest = Math.log(floor);
  for (let p = 0; p < rows; p++) {
    for (let q = 0; q < columns; q++) {
      const value = values[first + p * columns + q]!;
      table[(p + 1) * wide + q + 1] = value > floor ? Math.log(value) : lowest;
    }
  }
  return table;
}

function addBorder(table: Float64Array, other: Float64Array, rows: number, columns: number): void {
  const wide = columns + 1;
  for (let p = 1; p <= rows; p++) table[p * wide] = other[p * wide + 2]!;
  for (let q = 1; q <= columns; q++) table[q] = other[2 * wide + q]!;
  table[0] = table[2 * wide + 2]!;
}

/** A picture from a quarter plane's logarithms: bicubic, exponential, zero beyond. */
export function fillPlanar(
  [same, opposite]: QuarterTables,
  [along, across]: readonly [StretchedAxis, StretchedAxis],
  { map: [x1, y1, x2, y2] }: Whitened,
  scale: number,
  { x0, y0, pixel, width, height }: PixelGrid,
  out: Float64Array,
): void {
  const wide = across.count + 1;
  const [c1, c2] = [2 / along.stretch, 2 / across.stretch];
  const [n1, n2] = [along.stretch / along.step ** 2, across.stretch / across.step ** 2];
  const [last1, last2] = [along.count - 2, across.count - 2];
  const shift = Math.log(scale);
  let at = 0;
  for (let j = 0; j < height; j++) {
    const y = y0 + j * pixel;
    for (let i = 0; i < width; i++) {
      const x = x0 + i * pixel;
      const p = x1 * x + y1 * y;
      const q = x2 * x + y2 * y;
      const u = Math.sqrt(n1 * (Math.sqrt(1 + c1 * p * p) - 1));
      const v = Math.sqrt(n2 * (Math.sqrt(1 + c2 * q * q) - 1));
      if (u >= last1 || v >= last2) {
        out[at++] = 0;
        continue;
      }
      const table = p * q < 0 ? opposite : same;
      const iu = u | 0;
      const iv = v | 0;
      const f = v - iv;
      const w0 = (-f * (f - 1) * (f - 2)) / 6;
      const w1 = ((f + 1) * (f - 1) * (f - 2)) / 2;
      const w2 = (-(f + 1) * f * (f - 2)) / 2;
      const w3 = ((f + 1) * f * (f - 1)) / 6;
      const g = u - iu;
      let k = iu * wide + iv;
      let sum =
        ((-g * (g - 1) * (g - 2)) / 6) *
        (w0 * table[k]! + w1 * table[k + 1]! + w2 * table[k + 2]! + w3 * table[k + 3]!);
      k += wide;
      sum +=
        (((g + 1) * (g - 1) * (g - 2)) / 2) *
        (w0 * table[k]! + w1 * table[k + 1]! + w2 * table[k + 2]! + w3 * table[k + 3]!);
      k += wide;
      sum +=
        ((-(g + 1) * g * (g - 2)) / 2) *
        (w0 * table[k]! + w1 * table[k + 1]! + w2 * table[k + 2]! + w3 * table[k + 3]!);
      k += wide;
      sum +=
        (((g + 1) * g * (g - 1)) / 6) *
        (w0 * table[k]! + w1 * table[k + 1]! + w2 * table[k + 2]! + w3 * table[k + 3]!);
      out[at++] = Math.exp(sum + shift);
    }
  }
}
