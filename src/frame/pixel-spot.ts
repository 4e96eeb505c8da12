import type { Parameters } from "./kernel.ts";
import type { Covariance, Spot } from "./spot.ts";

/**
 * The same spot in the kernel's units (pixels, a vector) and in the analysis' units (µm, named): N and B are photons in
 * both, positions scale with the pixel's side a, Σ with a².
 */
export function toSpot(
  kind: "map" | "trace",
  p: Parameters,
  covariance: Float64Array,
  pixel: number,
  quality: { reducedChi2: number; outliers: number },
): Spot {
  const scale = unitsOf(kind, pixel);
  const n = scale.length;
  const uncertainty = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) uncertainty[i * n + j] = covariance[i * n + j]! * scale[i]! * scale[j]!;
  }
  const area = pixel * pixel;
  const map = kind === "map";
  const sigma: Covariance = map ? [p[3]! * area, p[4]! * area, p[5]! * area] : [p[2]! * area, 0, 0];
  return {
    photons: p[0]!,
    centre: [p[1]! * pixel, map ? p[2]! * pixel : 0],
    covariance: sigma,
    background: p[n - 1]!,
    uncertainty,
    ...quality,
  };
}

/** The spot's parameters in pixels and photons, for the kernel. */
export function toParameters(
  kind: "map" | "trace",
  spot: Pick<Spot, "photons" | "centre" | "covariance" | "background">,
  pixel: number,
): Parameters {
  const [x, y] = spot.centre;
  const [xx, xy, yy] = spot.covariance;
  const area = pixel * pixel;
  return kind === "map"
    ? Float64Array.of(spot.photons, x / pixel, y / pixel, xx / area, xy / area, yy / area, spot.background)
    : Float64Array.of(spot.photons, x / pixel, xx / area, spot.background);
}

/** What one kernel unit of each parameter is in the analysis' units. */
function unitsOf(kind: "map" | "trace", pixel: number): number[] {
  const area = pixel * pixel;
  return kind === "map" ? [1, pixel, pixel, area, area, area, 1] : [1, pixel, area, 1];
}

/** Where Σ and B stand in the parameter vector of each kind. */
export const LAYOUT = {
  map: { count: 7, photons: 0, position: [1, 2], variance: [3, 4, 5], background: 6 },
  trace: { count: 4, photons: 0, position: [1], variance: [2], background: 3 },
} as const;
