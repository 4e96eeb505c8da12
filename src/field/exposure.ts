import { normalCdf } from "../numerics/distributions.ts";
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

/** When light is collected, all in ns. */
export interface Timing {
  /** Gate opening of each frame, the pulse at 0. */
  readonly delays: readonly number[];
  /** How long each frame collects; 0 for an instant. A frame is the mean light over its gate. */
  readonly gate: number;
  /** Time between pulses; null for a single pulse. */
  readonly period: number | null;
  /** Standard deviation of the instrument's Gaussian response, centred on the pulse; 0 for none. */
  readonly responseSigma: number;
}

/** Standard deviations after which a Gaussian response has ended: 2e-9 of it lies beyond. */
const REACH = 6;

/**
 * The times whose light makes up each frame, rising in age. Gates are cut where a pulse falls into them; before the
 * only pulse there is no light, with a period the wake of the pulse before.
 *
 * @param rate relative change of the light at an age, 1/ns, falling with age (see `changeRate`)
 */
export function exposures(timing: Timing, rate: (age: number) => number): Exposure[] {
  const { delays, gate, period, responseSigma } = timing;
  const list = delays.flatMap((delay, frame) => {
    if (gate === 0 && responseSigma === 0) return instant(delay, frame, period);
    return windowParts(gate, responseSigma).flatMap(([from, to]) =>
      pieces(delay + from, delay + to, period).flatMap(({ zero, from, to }) =>
        nodesOver(from, to, Math.max(rate(from), responseSigma && 1.5 / responseSigma)).map(
          ({ at, weight }) => ({
            frame,
            age: at,
            weight: weight * collected(zero + at - delay, gate, responseSigma),
          }),
        ),
      ),
    );
  });
  return list.sort((a, b) => a.age - b.age);
}

/** Exposures of each frame, in the order they come in. */
export function byFrame(list: readonly Exposure[]): Map<number, Exposure[]> {
  const groups = new Map<number, Exposure[]>();
  for (const exposure of list) {
    const group = groups.get(exposure.frame);
    if (group === undefined) groups.set(exposure.frame, [exposure]);
    else group.push(exposure);
  }
  return groups;
}

function instant(delay: number, frame: number, period: number | null): Exposure[] {
  if (period !== null) return [{ frame, age: delay - period * Math.floor(delay / period), weight: 1 }];
  return delay < 0 ? [] : [{ frame, age: delay, weight: 1 }];
}

/** The gate with its blurred edges, relative to its opening; edges and flat middle apart where both exist. */
function windowParts(gate: number, sigma: number): [from: number, to: number][] {
  const blur = REACH * sigma;
  if (sigma === 0 || gate <= 2 * blur) return [[-blur, gate + blur]];
  return [
    [-blur, blur],
    [blur, gate - blur],
    [gate - blur, gate + blur],
  ];
}

/** Weight per time of light at x after the opening: the gate's mean, smeared by the response. */
function collected(x: number, gate: number, sigma: number): number {
  if (sigma === 0) return 1 / gate;
  if (gate === 0) return Math.exp(-0.5 * (x / sigma) ** 2) / (Math.sqrt(2 * Math.PI) * sigma);
  return (normalCdf((gate - x) / sigma) - normalCdf(-x / sigma)) / gate;
}

interface Piece {
  /** Time of the latest pulse. */
  readonly zero: number;
  /** Ages since that pulse. */
  readonly from: number;
  readonly to: number;
}

function pieces(from: number, to: number, period: number | null): Piece[] {
  if (period === null) return to <= 0 ? [] : [{ zero: 0, from: Math.max(from, 0), to }];
  const list: Piece[] = [];
  for (let pulse = Math.floor(from / period); pulse * period < to; pulse++) {
    const zero = pulse * period;
    const start = Math.max(from, zero) - zero;
    const end = Math.min(to, zero + period) - zero;
    if (end > start) list.push({ zero, from: start, to: end });
  }
  return list;
}

/**
 * How fast the light changes at an age, 1/ns: decay and capture, spreading, tr(DΣ(t)⁻¹), and annihilation, which no
 * spot outruns: k n ≤ 1/(1/(k n₀) + t). Repulsion adds b n₀ at most to spreading.
 */
export function changeRate(medium: Medium, start: Start): (age: number) => number {
  const [dxx, dxy, dyy] = medium.diffusion;
  const meeting = medium.annihilation * peakDensity(start);
  const push = 1 + Math.max(medium.repulsion * peakDensity(start), 0);
  return (age) => {
    const [xx, xy, yy] = spreadCovariance(start.covariance, medium.diffusion, age);
    const spreading = Math.abs(dxx * yy - 2 * dxy * xy + dyy * xx) / determinant([xx, xy, yy]);
    return removalRate(medium) + 2 * push * spreading + meeting / (1 + meeting * age);
  };
}
