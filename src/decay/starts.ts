import { accumulation } from "./exponential.ts";
import type { Instrument } from "./instrument.ts";
import type { Law } from "./law.ts";
import type { LightData } from "./light.ts";

/** The lifetimes between which a recording can tell anything, ns. */
export interface LifetimeRange {
  readonly shortest: number;
  readonly longest: number;
}

/** From a twentieth of the finest step (or gate) to a thousand times the record. */
export function lifetimeRange({ delays, gate }: LightData): LifetimeRange {
  let finest = gate > 0 ? gate : Number.POSITIVE_INFINITY;
  for (let i = 1; i < delays.length; i++) finest = Math.min(finest, delays[i]! - delays[i - 1]!);
  const span = Math.max(delays[delays.length - 1]! - delays[0]! + gate, finest);
  return { shortest: finest / 20, longest: 1000 * span };
}

const GRID = 18;

/** Lifetimes that cover what a recording can tell, evenly in their logarithm. */
export function lifetimeGrid({ shortest, longest }: LifetimeRange): number[] {
  const low = 4 * shortest;
  const high = longest / 100;
  return Array.from({ length: GRID }, (_, j) => low * (high / low) ** (j / (GRID - 1)));
}

/** Where the fits of one and of two exponentials begin. */
export interface ExponentialStarts {
  readonly one: number[];
  readonly two: number[];
}

/**
 * Starting values by linear regression on a grid of lifetimes: one exponential by the best of them, two by the best
 * pair with positive amplitudes. The instrument, dim and negative frames and uneven spacing are all in the regression,
 * so no logarithm of the data is taken.
 */
export function exponentialStarts(
  data: LightData,
  instrument: Instrument,
  range: LifetimeRange,
): ExponentialStarts {
  const taus = lifetimeGrid(range);
  const order = data.emissionOrder;
  const slope = new Float64Array(instrument.frames);
  const columns = taus.map((tau) => {
    const column = new Float64Array(instrument.frames);
    instrument.exponential(order / tau, column, slope);
    const { gain } = accumulation(1 / tau, instrument.period);
    return column.map((x, i) => (x * gain ** order) / data.sigma[i]!);
  });
  const y = Float64Array.from(data.light, (light, i) => light / data.sigma[i]!);
  const b = columns.map((column) => dot(column, y));
  const g = columns.map((column) => dot(column, column));

  let one = { fall: Number.NEGATIVE_INFINITY, start: [1, taus[GRID - 1]!] };
  let two = { fall: Number.NEGATIVE_INFINITY, start: [] as number[] };
  for (let j = 0; j < GRID; j++) {
    if (!(g[j]! > 0)) continue;
    // A negative amplitude is no start, but where all are negative the least bad must do.
    const fall = (b[j]! * Math.abs(b[j]!)) / g[j]!;
    if (fall > one.fall) one = { fall, start: [b[j]! / g[j]!, taus[j]!] };
    for (let k = 0; k < j; k++) {
      const cross = dot(columns[j]!, columns[k]!);
      const determinant = g[j]! * g[k]! - cross * cross;
      const slow = (b[j]! * g[k]! - b[k]! * cross) / determinant;
      const fast = (b[k]! * g[j]! - b[j]! * cross) / determinant;
      const both = slow * b[j]! + fast * b[k]!;
      if (slow > 0 && fast > 0 && both > two.fall) {
        const [s, f] = order === 1 ? [slow, fast] : [Math.sqrt(slow), Math.sqrt(fast)];
        two = { fall: both, start: [(s + f) ** order, f / (s + f), taus[k]!, taus[j]!] };
      }
    }
  }
  const [amplitude, tau] = one.start as [number, number];
  return { one: one.start, two: two.start.length > 0 ? two.start : [amplitude, 0.5, tau / 2, 2 * tau] };
}

/** Of several shapes (the parameters after the amplitude) the one that fits best with its best amplitude. */
export function bestStart(law: Law, data: LightData, shapes: readonly number[][]): number[] {
  const frames = data.light.length;
  const value = new Float64Array(frames);
  const jacobian = law.names.map(() => new Float64Array(frames));
  let best = { fall: Number.NEGATIVE_INFINITY, start: [] as number[] };
  for (const shape of shapes) {
    law.evaluate([1, ...shape], value, jacobian);
    let b = 0;
    let g = 0;
    for (let i = 0; i < frames; i++) {
      const w = value[i]! / data.sigma[i]! ** 2;
      b += w * data.light[i]!;
      g += w * value[i]!;
    }
    const fall = (b * Math.abs(b)) / g;
    if (fall > best.fall) best = { fall, start: [b / g, ...shape] };
  }
  return best.start.length > 0 ? best.start : [1, ...shapes[0]!];
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}
