import type { SmoothModels } from "../frame/references.ts";
import { erf } from "../numerics/distributions.ts";
import type { Acquisition } from "../stack/acquisition.ts";

/**
 * The share of a frame's light that the number of excitons alone would give, one entry a frame; null where it is all.
 *
 * Behind a slit of width w the line of a trace sees erf(w/(2√2·σ_y)) of the spot, with σ_y taken to grow like σ_x.
 * With light ∝ n² a spot of N pairs shines as ∫n² dA = N²/(4π√|Σ_n|), so light also fades as the spot thins out:
 * √|Σ(0)|/√|Σ(t)| on a map, and the same with σ_x·σ_y of a trace (derived from the Gaussian's integral).
 */
export function transmission(
  acquisition: Acquisition,
  kind: "map" | "trace",
  models: SmoothModels,
  frames: readonly number[],
): Float64Array | null {
  const { slit } = acquisition;
  const order = acquisition.sample.emissionOrder;
  const behindSlit = kind === "trace" && slit !== null;
  if (!behindSlit && order === 1) return null;
  const spread = (i: number): number => {
    const variance = models.variance(i);
    return kind === "map"
      ? Math.sqrt(Math.max(variance[0]! * variance[2]! - variance[1]! ** 2, 1e-12))
      : variance[0]!;
  };
  const first = spread(frames[0]!);
  return Float64Array.from(frames, (i) => {
    const sigmaY = Math.sqrt(spread(i));
    const slitShare = behindSlit ? erf(slit.width.value / (2 * Math.SQRT2 * sigmaY)) : 1;
    return order === 2 ? (slitShare * first) / spread(i) : slitShare;
  });
}

/** ∂ ln(transmission)/∂Σ of a frame whose spot has the variance Σ, 1/µm², in Σ's order; zeros where all light arrives. */
export function transmissionSlope(
  acquisition: Acquisition,
  kind: "map" | "trace",
  variance: readonly number[],
): number[] {
  const { slit } = acquisition;
  const thins = acquisition.sample.emissionOrder === 2;
  if (kind === "map") {
    if (!thins) return [0, 0, 0];
    const [xx, xy, yy] = variance as [number, number, number];
    const determinant = Math.max(xx * yy - xy * xy, 1e-12);
    return [-yy / (2 * determinant), xy / determinant, -xx / (2 * determinant)];
  }
  const xx = Math.max(variance[0]!, 1e-12);
  const byThinning = thins ? -1 / xx : 0;
  if (slit === null) return [byThinning];
  const z = slit.width.value / (2 * Math.SQRT2 * Math.sqrt(xx));
  // d erf(z)/dz = 2/√π·e^(−z²), dz/dΣ = −z/(2Σ)
  const bySlit = (-z * Math.exp(-z * z)) / (Math.sqrt(Math.PI) * xx * erf(z));
  return [byThinning + bySlit];
}
