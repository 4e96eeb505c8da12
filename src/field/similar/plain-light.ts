import type { Covariance } from "../../frame/spot.ts";
import { changeRate, exposures } from "../exposure.ts";
import { normalShare } from "../gaussian-light.ts";
import { plainMedium, spreadCovariance } from "../medium.ts";
import { memory } from "./earlier-pulses.ts";
import type { PixelGrid, SimilarLight, SimilarProblem } from "./problem.ts";

interface Part {
  readonly amount: number;
  /** With blur and a²/12. */
  readonly covariance: Covariance;
}

/** Plain diffusion and decay: each frame is a sum of Gaussians over gate nodes and earlier pulses. */
export function plainLight(problem: SimilarProblem): SimilarLight {
  const { lifetime, delays, period, kind } = problem;
  if (period !== null && lifetime === Infinity) {
    throw new RangeError("Excitons that never end pile up over the pulses: give a lifetime or no period.");
  }
  const [start, diffusion] =
    kind === "map"
      ? [problem.start, problem.diffusion]
      : [round(problem.start[0]), round(problem.diffusion[0])];
  const rate = changeRate(plainMedium(diffusion, lifetime), { amount: 1, covariance: start });
  const forgotten = memory(1 / lifetime);
  const parts: Part[][] = delays.map(() => []);
  for (const { frame, age, weight } of exposures(problem, rate)) {
    for (let t = age; t === age || t < forgotten; t += period!) {
      const spread = spreadCovariance(start, diffusion, t);
      parts[frame]!.push(seen(problem, weight * Math.exp(-t / lifetime), spread));
      if (period === null) break;
    }
  }
  const isRound = [start, diffusion].every(([xx, xy, yy]) => xx === yy && xy === 0);
  return {
    amount: (i) => parts[i]!.reduce((sum, part) => sum + part.amount, 0),
    caughtShare: () => 0,
    fill(i, grid, out) {
      out.fill(0, 0, grid.width * grid.height);
      for (const part of parts[i]!) {
        if (kind === "map") addMap(part, problem.pixel, grid, out);
        else addTrace(part, problem.pixel, grid, out);
      }
    },
    ...(kind === "map" && isRound
      ? {
          radial(i, step, count, out) {
            out.fill(0, 0, count);
            for (const part of parts[i]!) addRadial(part, problem.pixel, step, count, out);
          },
        }
      : {}),
  };
}

function round(value: number): Covariance {
  return [value, 0, value];
}

function seen(
  { kind, slit, blurVariance, pixel }: SimilarProblem,
  amount: number,
  [xx, xy, yy]: Covariance,
): Part {
  const pixelVariance = pixel ** 2 / 12;
  if (!(xx > 0 && xx * yy > xy * xy)) throw new RangeError("The spot's covariance is not positive definite.");
  if (kind === "map") {
    return { amount, covariance: [xx + blurVariance + pixelVariance, xy, yy + blurVariance + pixelVariance] };
  }
  const share = slit === null ? 1 : normalShare(-slit / 2, slit / 2, Math.sqrt(yy + blurVariance));
  return { amount: amount * share, covariance: [xx + blurVariance + pixelVariance, 0, 0] };
}

/**
 * Along a row the ratio of neighbours changes by a constant factor, so no exponential is needed but the first; from the
 * row's top outwards, where nothing can underflow early. The mean over a pixel is the Gaussian with a²/12 more variance,
 * less a⁴/2880·(∂_x⁴ + ∂_y⁴) of it.
 */
function addMap({ amount, covariance }: Part, pixel: number, grid: PixelGrid, out: Float64Array): void {
  const [xx, xy, yy] = covariance;
  const det = xx * yy - xy * xy;
  const [a, b, c] = [yy / det, -xy / det, xx / det];
  const peak = amount / (2 * Math.PI * Math.sqrt(det));
  const { x0, y0, pixel: step, width, height } = grid;
  const change = Math.exp(-a * step * step);
  const fourth = pixel ** 4 / 2880;
  for (let j = 0; j < height; j++) {
    const y = y0 + j * step;
    const top = Math.min(Math.max(Math.round(((-b / a) * y - x0) / step), 0), width - 1);
    for (const side of [1, -1]) {
      const first = side === 1 ? top : top - 1;
      const x = x0 + first * step;
      let value = peak * Math.exp(-0.5 * (a * x * x + 2 * b * x * y + c * y * y));
      let ratio = Math.exp(-0.5 * a * step * step - side * step * (a * x + b * y));
      for (let i = first; i >= 0 && i < width; i += side) {
        const u = a * (x0 + i * step) + b * y;
        const v = b * (x0 + i * step) + c * y;
        const bend = u * u * (u * u - 6 * a) + v * v * (v * v - 6 * c) + 3 * (a * a + c * c);
        const at = j * width + i;
        out[at] = out[at]! + Math.max(value * (1 - fourth * bend), 0);
        value *= ratio;
        ratio *= change;
      }
    }
  }
}

/** As `addMap`, with 3/4·∇⁴ for ∂_x⁴ + ∂_y⁴: the part that is the same in all directions. */
function addRadial(
  { amount, covariance: [xx] }: Part,
  pixel: number,
  step: number,
  count: number,
  out: Float64Array,
): void {
  const peak = amount / (2 * Math.PI * xx);
  const fourth = (0.75 * pixel ** 4) / (2880 * xx * xx);
  for (let i = 0; i < count; i++) {
    const w = (i * step) ** 2 / xx;
    out[i] = out[i]! + peak * Math.exp(-0.5 * w) * Math.max(1 - fourth * (w * (w - 8) + 8), 0);
  }
}

function addTrace(
  { amount, covariance: [xx] }: Part,
  pixel: number,
  grid: PixelGrid,
  out: Float64Array,
): void {
  const peak = amount / Math.sqrt(2 * Math.PI * xx);
  const fourth = pixel ** 4 / 2880;
  for (let i = 0; i < grid.width; i++) {
    const x = grid.x0 + i * grid.pixel;
    const w = (x * x) / xx;
    const bend = (w * (w - 6) + 3) / (xx * xx);
    out[i] = out[i]! + peak * Math.exp(-0.5 * w) * Math.max(1 - fourth * bend, 0);
  }
}
