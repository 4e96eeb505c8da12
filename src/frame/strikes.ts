import type { Parameters } from "./kernel.ts";
import { findOutliers } from "./outliers.ts";
import type { NoiseLaw, Patch } from "./patch.ts";

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

/** Finds hot, dead and struck pixels of a patch against the spot `p`. */
export function findStrikes(kind: "map" | "trace", patch: Patch, p: Parameters, noise: NoiseLaw): number[] {
  const { width, height } = patch.rectangle;
  return findOutliers(patch.data, width, height, noise, (i) => meanAt(kind, patch, p, i));
}
