import {
  determinant,
  type Medium,
  peakDensity,
  removalRate,
  type Start,
  spreadCovariance,
} from "./medium.ts";
import { nodesOver } from "./quadrature.ts";

/** Light at a time after the latest pulse, with its weight in a frame's mean over the gate. */
export interface Exposure {
  readonly frame: number;
  /** Time since the latest pulse, ns. */
  readonly age: number;
  readonly weight: number;
}

/**
 * The times whose light makes up each frame, rising in age. Gates are cut where a pulse falls into them; before the
 * only pulse there is no light, with a period the wake of the pulse before.
 *
 * @param delays gate openings, ns
 * @param gate length of each gate, ns
 * @param period time between pulses, ns, or null
 * @param rate relative change of the light at an age, 1/ns, falling with age (see `changeRate`)
 */
export function exposures(
  delays: readonly number[],
  gate: number,
  period: number | null,
  rate: (age: number) => number,
): Exposure[] {
  const list = delays.flatMap((delay, frame) =>
    gate === 0
      ? instant(delay, frame, period)
      : pieces(delay, delay + gate, period).flatMap(({ from, to }) =>
          nodesOver(from, to, rate(from)).map(({ at, weight }) => ({
            frame,
            age: at,
            weight: weight / gate,
          })),
        ),
  );
  return list.sort((a, b) => a.age - b.age);
}

function instant(delay: number, frame: number, period: number | null): Exposure[] {
  if (period !== null) return [{ frame, age: delay - period * Math.floor(delay / period), weight: 1 }];
  return delay < 0 ? [] : [{ frame, age: delay, weight: 1 }];
}

function pieces(from: number, to: number, period: number | null): { from: number; to: number }[] {
  if (period === null) return to <= 0 ? [] : [{ from: Math.max(from, 0), to }];
  const list: { from: number; to: number }[] = [];
  for (let pulse = Math.floor(from / period); pulse * period < to; pulse++) {
    const zero = pulse * period;
    const start = Math.max(from, zero) - zero;
    const end = Math.min(to, zero + period) - zero;
    if (end > start) list.push({ from: start, to: end });
  }
  return list;
}

/**
 * How fast the light changes at an age, 1/ns: decay and capture, spreading, tr(DΣ(t)⁻¹), and annihilation, which no
 * spot outruns: k n ≤ 1/(1/(k n₀) + t).
 */
export function changeRate(medium: Medium, start: Start): (age: number) => number {
  const [dxx, dxy, dyy] = medium.diffusion;
  const meeting = medium.annihilation * peakDensity(start);
  return (age) => {
    const [xx, xy, yy] = spreadCovariance(start.covariance, medium.diffusion, age);
    const spreading = Math.abs(dxx * yy - 2 * dxy * xy + dyy * xx) / determinant([xx, xy, yy]);
    return removalRate(medium) + 2 * spreading + meeting / (1 + meeting * age);
  };
}
