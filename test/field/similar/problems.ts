import type { PixelGrid, SimilarLight, SimilarProblem } from "../../../src/field/similar/problem.ts";
import type { Covariance } from "../../../src/frame/spot.ts";

export const ROUND: SimilarProblem = {
  kind: "map",
  start: [0.1, 0, 0.1],
  diffusion: [0.02, 0, 0.02],
  lifetime: 6,
  repulsion: 0,
  annihilation: 0,
  capture: 0,
  trapLifetime: 15,
  trapLight: 0.7,
  blurVariance: 0,
  pixel: 0,
  delays: [0, 0.5, 2, 6, 12],
  gate: 0,
  responseSigma: 0,
  period: null,
  slit: null,
};

/** Principal axes of spot and diffusion differ. */
export const TURNED = {
  start: [0.1, 0.02, 0.08] as Covariance,
  diffusion: [0.017, 0.0052, 0.011] as Covariance,
};

export function problem(...parts: Partial<SimilarProblem>[]): SimilarProblem {
  return Object.assign({}, ROUND, ...parts) as SimilarProblem;
}

export function square(half: number, pixel: number): PixelGrid {
  const width = 2 * Math.round(half / pixel) + 1;
  const x0 = (-(width - 1) / 2) * pixel;
  return { x0, y0: x0, pixel, width, height: width };
}

export function picture(light: SimilarLight, frame: number, grid: PixelGrid): Float64Array {
  const out = new Float64Array(grid.width * grid.height);
  light.fill(frame, grid, out);
  return out;
}

/** Light per area at one point. */
export function at(light: SimilarLight, frame: number, x: number, y: number): number {
  return picture(light, frame, { x0: x, y0: y, pixel: 1, width: 1, height: 1 })[0]!;
}

/** Amount and covariance by adding up points; exact for smooth functions that die out inside the grid. */
export function moments(values: Float64Array, { x0, y0, pixel, width }: PixelGrid) {
  let [sum, xx, xy, yy] = [0, 0, 0, 0];
  values.forEach((value, i) => {
    const x = x0 + (i % width) * pixel;
    const y = y0 + Math.floor(i / width) * pixel;
    sum += value;
    xx += value * x * x;
    xy += value * x * y;
    yy += value * y * y;
  });
  return { amount: sum * pixel * pixel, covariance: [xx / sum, xy / sum, yy / sum] as const };
}

/** Largest difference as a part of b's peak. */
export function difference(a: Float64Array, b: Float64Array): number {
  let [worst, peak] = [0, 0];
  b.forEach((value, i) => {
    peak = Math.max(peak, value);
    worst = Math.max(worst, Math.abs(value - a[i]!));
  });
  return worst / peak;
}
