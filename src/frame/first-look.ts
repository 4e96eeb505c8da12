import { cutPatch, rectangleAround } from "./cut.ts";
import type { PatchFit } from "./fit-spot.ts";
import { fitPatch } from "./fit-spot.ts";
import type { Parameters } from "./kernel.ts";
import { excludeFrom, findOutliers, medianAround } from "./outliers.ts";
import type { NoiseLaw } from "./patch.ts";

/** Standard deviations of a last step after which the fit is near enough for all that starts from it. */
export const NEAR = 0.02;

/**
 * Finds the one spot of a bright picture (the sum of many frames): a maximum of the smoothed picture, its width from
 * the area above half of the maximum, then maximum likelihood from a few widths around it.
 *
 * @param picture photons, row-major; for a trace one row
 * @param noise the noise law of this picture (for a sum of K frames the floor is K times that of one)
 * @returns the fit in pixels and photons, or null where no start leads to a spot
 */
export function firstLook(
  kind: "map" | "trace",
  picture: Float64Array,
  width: number,
  height: number,
  noise: NoiseLaw,
): PatchFit | null {
  const background = median(picture);
  // a hot pixel may outshine the spot many times: the maximum is looked for without it
  const calm = picture.slice();
  for (const i of findOutliers(picture, width, height, noise, () => background))
    calm[i] = medianAround(picture, width, height, i);
  const smooth = boxMean(calm, width, height, kind);
  const top = indexOfMaximum(smooth);
  const peak = smooth[top]! - background;
  if (!(peak > 0)) return null;
  const variance = varianceFromHalfArea(kind, smooth, background + peak / 2);
  const [x, y] = [top % width, Math.floor(top / width)];
  const reach = 6 * Math.sqrt(variance) + 6;
  const rectangle = rectangleAround([x, y], [reach, kind === "map" ? reach : 0], width, height);
  const patch = cutPatch(picture, width, rectangle);
  const calmPatch = cutPatch(smooth, width, rectangle).data;
  excludeFrom(
    patch,
    findOutliers(patch.data, rectangle.width, rectangle.height, noise, (i) => calmPatch[i]!),
  );

  for (const factor of [1, 0.3, 3]) {
    const start = startAt(kind, x, y, variance * factor, peak, background);
    const fit = fitPatch(kind, patch, start, noise, NEAR);
    if (fit.converged && fit.parameters[0]! ** 2 > 25 * fit.covariance[0]!) return fit;
  }
  return null;
}

function startAt(
  kind: "map" | "trace",
  x: number,
  y: number,
  variance: number,
  peak: number,
  background: number,
): Parameters {
  return kind === "map"
    ? Float64Array.of(peak * 2 * Math.PI * variance, x, y, variance, 0, variance, Math.max(background, 1e-6))
    : Float64Array.of(peak * Math.sqrt(2 * Math.PI * variance), x, variance, Math.max(background, 1e-6));
}

/** A disc of area A above half maximum belongs to σ² = A/(2π ln 2); a line of length ℓ to σ² = ℓ²/(8 ln 2). */
function varianceFromHalfArea(kind: "map" | "trace", smooth: Float64Array, level: number): number {
  let pixels = 0;
  for (const value of smooth) if (value >= level) pixels++;
  return kind === "map" ? pixels / (2 * Math.PI * Math.LN2) : pixels ** 2 / (8 * Math.LN2);
}

/** Median of at most some 4,000 evenly spaced pixels: a first background, good enough to start from. */
function median(values: Float64Array): number {
  const stride = Math.max(1, Math.floor(values.length / 4096));
  const sample = new Float64Array(Math.ceil(values.length / stride));
  for (let i = 0; i < sample.length; i++) sample[i] = values[i * stride]!;
  sample.sort();
  return sample[sample.length >> 1]!;
}

/** Running mean over a square (a line for a trace) of about a fifteenth of the picture's side. */
function boxMean(picture: Float64Array, width: number, height: number, kind: "map" | "trace"): Float64Array {
  const reach = Math.max(1, Math.round((kind === "map" ? Math.min(width, height) : width) / 30));
  const rows = new Float64Array(picture.length);
  for (let y = 0; y < height; y++) runningMean(picture, rows, y * width, 1, width, reach);
  if (kind === "trace") return rows;
  const smooth = new Float64Array(picture.length);
  for (let x = 0; x < width; x++) runningMean(rows, smooth, x, width, height, reach);
  return smooth;
}

function runningMean(
  from: Float64Array,
  to: Float64Array,
  start: number,
  stride: number,
  count: number,
  reach: number,
) {
  let sum = 0;
  let inside = 0;
  for (let i = -reach; i < count; i++) {
    const entering = i + reach;
    if (entering < count) {
      sum += from[start + entering * stride]!;
      inside++;
    }
    const leaving = i - reach - 1;
    if (leaving >= 0) {
      sum -= from[start + leaving * stride]!;
      inside--;
    }
    if (i >= 0) to[start + i * stride] = sum / inside;
  }
}

function indexOfMaximum(values: Float64Array): number {
  let best = 0;
  for (let i = 1; i < values.length; i++) if (values[i]! > values[best]!) best = i;
  return best;
}
