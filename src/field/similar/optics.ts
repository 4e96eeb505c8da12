import type { Covariance } from "../../frame/spot.ts";
import type { SimilarProblem } from "./problem.ts";
import type { Whitened } from "./whitened.ts";

/**
 * What happens to the light between sample and pixels, in the whitened frame: blur and pixels add variance, and beyond
 * its a²/12 the mean over a pixel has the term −a⁴/2880·(∂_x⁴ + ∂_y⁴).
 */
export interface Optics {
  readonly blur: Covariance;
  /**
   * That term's factors of ∂₁⁴, ∂₁³∂₂, ∂₁²∂₂², ∂₁∂₂³, ∂₂⁴. A round screen takes the first for ∇⁴, the part of the term
   * that is round; what it leaves out is 2e-5 of the peak at a = σ/2 and falls as a⁴.
   */
  readonly fourth: readonly [number, number, number, number, number];
}

export function opticsOf({ kind, pixel }: SimilarProblem, frame: Whitened): Optics {
  // a trace averages over its pixels where the strip is laid
  const strength = kind === "map" ? -(pixel ** 4) / 2880 : 0;
  const [x1, y1, x2, y2] = frame.map;
  if (frame.round) {
    return { blur: frame.blur, fourth: [0.75 * strength * (x1 * x1 + y1 * y1) ** 2, 0, 0, 0, 0] };
  }
  const part = (i: number, j: number) => strength * (x1 ** i * x2 ** j + y1 ** i * y2 ** j);
  return {
    blur: frame.blur,
    fourth: [part(4, 0), 4 * part(3, 1), 6 * part(2, 2), 4 * part(1, 3), part(0, 4)],
  };
}
