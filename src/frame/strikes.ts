import type { Parameters } from "./kernel.ts";
import { isOutlier } from "./outliers.ts";
import type { NoiseLaw, Patch } from "./patch.ts";
import { pixelVariance } from "./patch.ts";

/** Mean photons of one pixel of the patch by the spot `p`; pixels and photons. */
export function meanAt(kind: "map" | "trace", patch: Patch, p: Parameters, index: number): number {
  const { x0, y0, width } = patch.rectangle;
  const dx = x0 + (index % width) - p[1]!;
  if (kind === "trace")
    return (p[0]! / Math.sqrt(2 * Math.PI * p[2]!)) * Math.exp((-0.5 * dx * dx) / p[2]!) + p[3]!;
  const dy = y0 + Math.floor(index / width) - p[2]!;
  const xx = p[3]!;
  const xy = p[4]!;
  const yy = p[5]!;
  const determinant = xx * yy - xy * xy;
  const q = (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant;
  return (p[0]! / (2 * Math.PI * Math.sqrt(determinant))) * Math.exp(-0.5 * q) + p[6]!;
}

/**
 * Finds hot, dead and struck pixels of a patch by {@link isOutlier} against the spot `p`.
 *
 * Only pixels that stand out of their neighbours along the row or the column, at half the tolerance, are looked at:
 * the others cannot stand out of all eight.
 */
export function findStrikes(kind: "map" | "trace", patch: Patch, p: Parameters, noise: NoiseLaw): number[] {
  const { data } = patch;
  const { width, height } = patch.rectangle;
  const found: number[] = [];
  for (let y = 0; y < height; y++) {
    for (let x = 0; x < width; x++) {
      const i = y * width + x;
      const value = data[i]!;
      const left = x > 0 ? data[i - 1]! : data[i + 1]!;
      const right = x < width - 1 ? data[i + 1]! : data[i - 1]!;
      const above = y > 0 ? data[i - width]! : y < height - 1 ? data[i + width]! : left;
      const below = y < height - 1 ? data[i + width]! : y > 0 ? data[i - width]! : right;
      const across = (left + right) / 2;
      const along = (above + below) / 2;
      const gapAcross = value - across;
      const gapAlong = value - along;
      const gap2 = Math.max(gapAcross * gapAcross, gapAlong * gapAlong);
      // a quarter of (5.5 s.d. + 5 photons)² is at least 7.5 variances and 6 photons² at the smaller neighbourhood
      const least = Math.min(across, along);
      if (gap2 < 7.5 * pixelVariance(noise, Math.min(least, value)) + 6) continue;
      if (isOutlier(data, width, height, i, noise, meanAt(kind, patch, p, i))) found.push(i);
    }
  }
  return found;
}
