import type { Parameters } from "./kernel.ts";
import type { NoiseLaw, Patch } from "./patch.ts";
import { pixelVariance } from "./patch.ts";
import { meanAt } from "./strikes.ts";

/** Pearson's χ² of background pixels, how many they are, and the variance of that χ². */
export interface Scatter {
  readonly chi2: number;
  readonly pixels: number;
  readonly variance: number;
}

/**
 * How much the pixels around the spot (beyond four standard deviations) scatter, against the detector's stated noise.
 * Only pixels that carry next to no spot are asked, so a spot that is not Gaussian is not taken for noise.
 *
 * The variance of one pixel's (d − m)²/v is 2 + 1/m for Poisson counts (its fourth cumulant) and 2 for a normal one.
 *
 * @param p the spot in pixels and photons
 */
export function backgroundScatter(
  kind: "map" | "trace",
  patch: Patch,
  p: Parameters,
  noise: NoiseLaw,
): Scatter {
  const map = kind === "map";
  const [xx, xy, yy] = map ? [p[3]!, p[4]!, p[5]!] : [p[2]!, 0, 1];
  const determinant = xx * yy - xy * xy;
  const { x0, y0, width } = patch.rectangle;
  const level = Math.max(p[map ? 6 : 3]!, 0);
  const excluded = new Set(patch.excluded);
  let chi2 = 0;
  let pixels = 0;
  for (let i = 0; i < patch.data.length; i++) {
    const dx = x0 + (i % width) - p[1]!;
    const dy = map ? y0 + Math.floor(i / width) - p[2]! : 0;
    if (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy < 16 * determinant || excluded.has(i)) continue;
    const mean = meanAt(kind, patch, p, i);
    chi2 += (patch.data[i]! - mean) ** 2 / pixelVariance(noise, mean);
    pixels++;
  }
  const skewness = noise.floor > 0 ? 0 : 1 / Math.max(level, 1e-9);
  return { chi2, pixels, variance: pixels * (2 + skewness) };
}
