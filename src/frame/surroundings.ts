import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { tolerance } from "./outliers.ts";
import type { NoiseLaw } from "./patch.ts";
import { pixelVariance } from "./patch.ts";

/** How even the background is around the spot. */
export interface Surroundings {
  /** Probability of the differences between sectors if the background is the same all around. */
  readonly p: number;
  /** Largest difference between a sector's mean and the mean of all, over that mean. */
  readonly swing: number;
}

const SECTORS = 8;

function octant(dx: number, dy: number): number {
  return (dx < 0 ? 4 : 0) + (dy < 0 ? 2 : 0) + (Math.abs(dx) < Math.abs(dy) ? 1 : 0);
}

/**
 * Compares the background in eight sectors around the spot, in the sum of many frames: χ² of their means about the
 * common mean. Only pixels more than `reach` (in x and y) from the centre count; too few of them say nothing (p = 1).
 *
 * @param noise the noise law of this picture
 */
export function surveyBackground(
  picture: Float64Array,
  width: number,
  height: number,
  centre: readonly [number, number],
  reach: readonly [number, number],
  noise: NoiseLaw,
): Surroundings {
  const sums = new Float64Array(SECTORS);
  const counts = new Float64Array(SECTORS);
  const outside = (x: number, y: number): boolean =>
    ((x - centre[0]) / reach[0]) ** 2 + (height > 1 ? ((y - centre[1]) / reach[1]) ** 2 : 0) > 1;
  const visit = (take: (sector: number, value: number) => void): void => {
    for (let y = 0; y < height; y++) {
      for (let x = 0; x < width; x++) {
        if (!outside(x, y)) continue;
        take(octant(x - centre[0], height > 1 ? y - centre[1] : 0), picture[y * width + x]!);
      }
    }
  };
  let all = 0;
  let pixels = 0;
  visit((_, value) => {
    all += value;
    pixels++;
  });
  if (pixels < 16 * SECTORS && height > 1) return { p: 1, swing: 0 };
  if (pixels < 8) return { p: 1, swing: 0 };
  const mean = all / pixels;
  const limit = tolerance(noise, mean);
  visit((sector, value) => {
    // a struck pixel is no unevenness of the background
    if (Math.abs(value - mean) > 3 * limit) return;
    sums[sector]! += value;
    counts[sector]! += 1;
  });
  const total = counts.reduce((a, b) => a + b, 0);
  const level = sums.reduce((a, b) => a + b, 0) / total;
  const variance = pixelVariance(noise, level);
  let chi2 = 0;
  let swing = 0;
  let used = 0;
  for (let s = 0; s < SECTORS; s++) {
    if (counts[s]! < 4) continue;
    const difference = sums[s]! / counts[s]! - level;
    chi2 += (difference ** 2 * counts[s]!) / variance;
    swing = Math.max(swing, Math.abs(difference) / Math.max(Math.abs(level), 1e-12));
    used++;
  }
  return used < 2 ? { p: 1, swing: 0 } : { p: chiSquareUpperTail(chi2, used - 1), swing };
}
