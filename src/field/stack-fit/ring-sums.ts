import type { StackData, StackFrame } from "./stack-data.ts";

/** What is added up at each node: 1, x, y, x², xy, y², d, dx, dy; d a pixel's photons, x and y from the centre in µm. */
export const SUMS = 9;

/** Distance of the nodes in widths of the spot. */
const STEP = 0.1;
/** Nodes beyond the farthest pixel that interpolation and derivatives along the radius reach for. */
const SPARE = 6;
/** Nodes before the centre that interpolation reaches for; they stand for those at the same distance. */
const BEFORE = 2;

/**
 * The pixels of every frame gathered on circles around the centre, r_j = j·step: the transpose of interpolation through
 * six points (Lagrange, Abramowitz and Stegun 25.2.21). For an even smooth f(r),
 * Σ_pixels d·f(r) = Σ_j f(r_j)·(sum of d at node j), and likewise with 1, x, y and their products in place of d. For
 * a round spot all sums over pixels that a fit needs are of this kind, so that models are computed at nodes only.
 */
export interface RingSums {
  /** µm */
  readonly step: number;
  readonly frames: readonly RingFrame[];
}

export interface RingFrame {
  /** Nodes from the centre on. */
  readonly count: number;
  /** SUMS numbers a node. */
  readonly sums: Float64Array;
}

const made = new WeakMap<StackData, { readonly x: number; readonly y: number; readonly sums: RingSums }>();

/** Sums around a centre, kept for the next call with the same. */
export function ringSums(data: StackData, x: number, y: number): RingSums {
  const last = made.get(data);
  if (last !== undefined && last.x === x && last.y === y) return last.sums;
  // one distance for all frames: traps keep the start's width in the last frame
  const narrowest = Math.min(...data.frames.map(({ variance }) => variance));
  const step = STEP * Math.sqrt(narrowest);
  const sums = { step, frames: data.frames.map((frame) => gather(frame, data.pixel, x, y, step)) };
  made.set(data, { x, y, sums });
  return sums;
}

function gather({ patch, shift }: StackFrame, pixel: number, x: number, y: number, step: number): RingFrame {
  const { x0, y0, width, height } = patch.rectangle;
  const left = x0 * pixel - x - shift[0];
  const top = y0 * pixel - y - shift[1];
  const farX = Math.max(Math.abs(left), Math.abs(left + (width - 1) * pixel));
  const farY = Math.max(Math.abs(top), Math.abs(top + (height - 1) * pixel));
  const count = Math.ceil(Math.hypot(farX, farY) / step) + SPARE;
  const sums = new Float64Array((count + BEFORE) * SUMS);
  const excluded = new Set(patch.excluded);
  let i = 0;
  for (let row = 0; row < height; row++) {
    const dy = top + row * pixel;
    for (let column = 0; column < width; column++, i++) {
      if (excluded.size > 0 && excluded.has(i)) continue;
      const dx = left + column * pixel;
      spread(sums, Math.sqrt(dx * dx + dy * dy) / step, dx, dy, patch.data[i]!);
    }
  }
  for (let before = 1; before <= BEFORE; before++) {
    for (let m = 0; m < SUMS; m++) {
      sums[(BEFORE + before) * SUMS + m]! += sums[(BEFORE - before) * SUMS + m]!;
    }
  }
  return { count, sums: sums.subarray(BEFORE * SUMS) };
}

const points = new Float64Array(6);
const parts = new Float64Array(SUMS);

/** Adds a pixel at the distance u, in steps. */
function spread(sums: Float64Array, u: number, x: number, y: number, d: number): void {
  const first = u | 0;
  const f = u - first;
  const [a, b, c, e, g] = [f + 2, f + 1, f - 1, f - 2, f - 3];
  const inner = b * f * c;
  const outer = c * e * g;
  points[0] = (-inner * e * g) / 120;
  points[1] = (a * f * outer) / 24;
  points[2] = (-a * b * outer) / 12;
  points[3] = (a * b * f * e * g) / 12;
  points[4] = (-a * inner * g) / 24;
  points[5] = (a * inner * e) / 120;
  parts[0] = 1;
  parts[1] = x;
  parts[2] = y;
  parts[3] = x * x;
  parts[4] = x * y;
  parts[5] = y * y;
  parts[6] = d;
  parts[7] = x * d;
  parts[8] = y * d;
  let at = first * SUMS;
  for (let j = 0; j < 6; j++) {
    const w = points[j]!;
    for (let m = 0; m < SUMS; m++, at++) sums[at] = sums[at]! + w * parts[m]!;
  }
}

/** I′(r)/r at the nodes from I at the nodes, by differences of sixth order; I is even. */
export function slopeOverRadius(profile: Float64Array, count: number, step: number, out: Float64Array): void {
  const at = (j: number): number => profile[Math.abs(j)]!;
  out.fill(0, 0, count);
  const middle = 270 * at(1) - 27 * at(2) + 2 * at(3) - 245 * at(0);
  out[0] = (2 * middle) / (180 * step * step);
  for (let j = 1; j < count - 3; j++) {
    const slope = 45 * (at(j + 1) - at(j - 1)) - 9 * (at(j + 2) - at(j - 2)) + (at(j + 3) - at(j - 3));
    out[j] = slope / (60 * step * step * j);
  }
}
