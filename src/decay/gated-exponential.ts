import type { Column, Timing } from "./timing.ts";

/** One stretch of a gate between pulses: opened `start` after the last pulse, `length` long, `share` of the gate. */
interface Piece {
  readonly frame: number;
  readonly start: number;
  readonly length: number;
  readonly share: number;
}

/**
 * An exponential averaged over gates, no response: over a stretch [a, a+ℓ] since the pulse, with x = r·ℓ,
 *
 *     (1/ℓ) ∫ e^(−r·u) du = e^(−r·a) · (1 − e^(−x))/x ,
 *
 * weighted by ℓ/w and summed over the stretches into which pulses cut the gate.
 */
export function gatedColumn(timing: Timing): Column {
  const pieces = cutGates(timing);
  return (rate, value, slope) => {
    value.fill(0);
    slope.fill(0);
    let lastLength = Number.NaN;
    let p = 1;
    let dp = 0;
    for (const { frame, start, length, share } of pieces) {
      if (length !== lastLength) {
        p = meanExponential(rate * length);
        dp = length * meanExponentialSlope(rate * length);
        lastLength = length;
      }
      const e = share * Math.exp(-rate * start);
      value[frame]! += e * p;
      slope[frame]! += e * (dp - start * p);
    }
  };
}

/** The stretches of every gate that lie after a pulse. A frame that ends before the first pulse has none. */
export function cutGates({ delays, gate, period }: Timing): Piece[] {
  const pieces: Piece[] = [];
  for (let frame = 0; frame < delays.length; frame++) {
    const open = delays[frame]!;
    if (gate === 0) {
      const start = period === null ? open : sincePulse(open, period);
      if (start >= 0) pieces.push({ frame, start, length: 0, share: 1 });
      continue;
    }
    const close = open + gate;
    let from = period === null ? Math.max(0, open) : open;
    while (from < close) {
      const start = period === null ? from : sincePulse(from, period);
      const length = Math.min(close - from, (period ?? Number.POSITIVE_INFINITY) - start);
      pieces.push({ frame, start, length, share: length / gate });
      from += length;
      // A step lost to rounding at a pulse: the rest is of no weight.
      if (!(length > 1e-12 * gate)) break;
    }
  }
  return pieces;
}

/** t modulo the period, in [0, period). A hair before a pulse counts as after it: 0.1·3 is meant as 0.3. */
export function sincePulse(t: number, period: number): number {
  const turns = Math.floor(t / period + 1e-12);
  return Math.max(0, t - turns * period);
}

/** (1 − e^(−x))/x */
export function meanExponential(x: number): number {
  return Math.abs(x) < 1e-5 ? 1 - x / 2 + (x * x) / 6 : -Math.expm1(-x) / x;
}

/** d/dx of {@link meanExponential} */
export function meanExponentialSlope(x: number): number {
  if (Math.abs(x) < 1e-2) return -1 / 2 + x * (1 / 3 - x * (1 / 8 - x * (1 / 30 - x * (1 / 144 - x / 840))));
  return (Math.exp(-x) + Math.expm1(-x) / x) / x;
}
