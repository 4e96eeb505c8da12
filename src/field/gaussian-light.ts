import type { Covariance } from "../frame/spot.ts";
import { changeRate, type Exposure, exposures } from "./exposure.ts";
import { determinant, type Medium, type Start, spreadCovariance } from "./medium.ts";
import { nodesOver } from "./quadrature.ts";
import {
  centreOf,
  EMPTY_LIGHT,
  type FrameLight,
  hasSlit,
  type MeanFrames,
  type Recording,
} from "./recording.ts";

interface Component {
  readonly amount: number;
  readonly covariance: Covariance;
}

/** Light of earlier pulses below this share of a fresh one is left out. */
const FORGOTTEN = 1e-12;

/**
 * Mean frames of plain diffusion and decay, without any grid: a Gaussian stays one, Σ(t) = Σ₀ + 2Dt (Einstein 1905).
 *
 * Frames are sums of Gaussians over the nodes of the gate and over earlier pulses, each integrated over the pixels
 * (and the slit): along the axes one by one where Σ is diagonal, by nodes in both directions where it is turned.
 *
 * @param medium with annihilation = capture = 0
 */
export function gaussianLight(medium: Medium, start: Start, recording: Recording): MeanFrames {
  const list = exposures(recording, changeRate(medium, start));
  const components: Component[][] = recording.delays.map(() => []);
  for (const exposure of list) {
    components[exposure.frame]!.push(...spotsAt(exposure, medium, start, recording.period));
  }
  return {
    frames: components.map((parts, frame) => render(parts, recording, centreOf(recording, frame))),
    light: components.map((parts) => lightOf(parts, recording)),
  };
}

function spotsAt(
  { age, weight }: Exposure,
  medium: Medium,
  start: Start,
  period: number | null,
): Component[] {
  const spots: Component[] = [];
  for (let t = age; ; t += period!) {
    const survival = Math.exp(-t / medium.lifetime);
    if (survival < FORGOTTEN && t > age) break;
    spots.push({
      amount: start.amount * weight * survival,
      covariance: spreadCovariance(start.covariance, medium.diffusion, t),
    });
    if (period === null) break;
  }
  return spots;
}

function render(
  parts: readonly Component[],
  recording: Recording,
  centre: readonly [number, number],
): Float64Array {
  const frame = new Float64Array(recording.columns * recording.rows);
  for (const { amount, covariance } of parts) {
    const blurred: Covariance = [
      covariance[0] + recording.psfVariance,
      covariance[1],
      covariance[2] + recording.psfVariance,
    ];
    if (blurred[1] === 0) addStraight(frame, amount, blurred, recording, centre);
    else addTurned(frame, amount, blurred, recording, centre);
  }
  return frame;
}

function addStraight(
  frame: Float64Array,
  amount: number,
  [xx, , yy]: Covariance,
  { columns, rows, pixelX, pixelY }: Recording,
  [cx, cy]: readonly [number, number],
): void {
  const alongX = pixelShares(columns, pixelX, cx, Math.sqrt(xx));
  const alongY = pixelShares(rows, pixelY, cy, Math.sqrt(yy));
  for (let iy = 0; iy < rows; iy++) {
    const scale = amount * alongY[iy]!;
    for (let ix = 0; ix < columns; ix++)
      frame[iy * columns + ix] = frame[iy * columns + ix]! + scale * alongX[ix]!;
  }
}

function pixelShares(count: number, size: number, centre: number, sd: number): Float64Array {
  const shares = new Float64Array(count);
  for (let i = 0; i < count; i++)
    shares[i] = normalShare((i - 0.5) * size - centre, (i + 0.5) * size - centre, sd);
  return shares;
}

/**
 * Probability of a normal deviate of standard deviation sd between lo and hi, by Gauss–Legendre points: unlike a
 * difference of error functions it keeps its digits far from the centre.
 */
export function normalShare(lo: number, hi: number, sd: number): number {
  const from = Math.max(lo, -9 * sd);
  const to = Math.min(hi, 9 * sd);
  let sum = 0;
  for (const { at, weight } of nodesOver(from, to, 2 / sd)) sum += weight * Math.exp(-0.5 * (at / sd) ** 2);
  return sum / (Math.sqrt(2 * Math.PI) * sd);
}

function addTurned(
  frame: Float64Array,
  amount: number,
  covariance: Covariance,
  { columns, rows, pixelX, pixelY }: Recording,
  [cx, cy]: readonly [number, number],
): void {
  const [xx, xy, yy] = covariance;
  const det = determinant(covariance);
  const peak = amount / (2 * Math.PI * Math.sqrt(det));
  // the narrowest cut along each axis sets how finely a pixel is divided
  const inX = nodesOver(-pixelX / 2, pixelX / 2, 1.2 / Math.sqrt(det / yy));
  const reach = 9 * Math.sqrt(yy);
  for (let iy = 0; iy < rows; iy++) {
    const lo = Math.max((iy - 0.5) * pixelY - cy, -reach);
    const hi = Math.min((iy + 0.5) * pixelY - cy, reach);
    for (const inY of nodesOver(
      Number.isNaN(lo) ? -reach : lo,
      Number.isNaN(hi) ? reach : hi,
      1.2 / Math.sqrt(det / xx),
    )) {
      for (let ix = 0; ix < columns; ix++) {
        const x = ix * pixelX - cx;
        let sum = 0;
        for (const { at, weight } of inX) {
          const dx = x + at;
          sum +=
            weight * Math.exp((-0.5 * (yy * dx * dx - 2 * xy * dx * inY.at + xx * inY.at * inY.at)) / det);
        }
        frame[iy * columns + ix] = frame[iy * columns + ix]! + peak * inY.weight * sum;
      }
    }
  }
}

function lightOf(parts: readonly Component[], recording: Recording): FrameLight {
  if (parts.length === 0) return EMPTY_LIGHT;
  const seen = hasSlit(recording) ? parts.map((part) => behindSlit(part, recording)) : parts;
  const amount = seen.reduce((sum, part) => sum + part.amount, 0);
  const mean = (axis: 0 | 1 | 2) =>
    amount === 0 ? 0 : seen.reduce((sum, part) => sum + part.amount * part.covariance[axis], 0) / amount;
  return { amount, covariance: [mean(0), mean(1), mean(2)], caughtShare: 0 };
}

/** A normal spot cut to |y − c| < w/2: the light left, and its variance along x. */
function behindSlit({ amount, covariance: [xx, xy, yy] }: Component, recording: Recording): Component {
  const { pixelY, psfVariance, centre } = recording;
  const sd = Math.sqrt(yy + psfVariance);
  const lo = -pixelY / 2 - centre[1];
  const hi = pixelY / 2 - centre[1];
  const share = normalShare(lo, hi, sd);
  const slope = xy / (sd * sd);
  return {
    amount: amount * share,
    covariance: [xx - slope * slope * (sd * sd - cutVariance(lo, hi, sd)), 0, 0],
  };
}

function cutVariance(lo: number, hi: number, sd: number): number {
  let sum = 0;
  let first = 0;
  let second = 0;
  for (const { at, weight } of nodesOver(Math.max(lo, -9 * sd), Math.min(hi, 9 * sd), 2 / sd)) {
    const density = weight * Math.exp(-0.5 * (at / sd) ** 2);
    sum += density;
    first += density * at;
    second += density * at * at;
  }
  return sum === 0 ? 0 : second / sum - (first / sum) ** 2;
}
