/** Why a frame, or its width, is set aside. */
export type FrameFlag =
  | "before-pulse"
  | "too-dim"
  | "saturated"
  | "empty"
  | "fit-failed"
  | "outside-window"
  | "trap-dominated";

/** A symmetric 2×2 matrix [xx, xy, yy]; a trace uses xx alone, with xy = yy = 0. */
export type Covariance = readonly [xx: number, xy: number, yy: number];

/**
 * One frame's spot: m(r) = N·a²/(2π√|Σ|)·exp(−½ (r−c)ᵀΣ⁻¹(r−c)) + B on a map, and the same with one axis on a trace.
 * Lengths in µm from the centre of pixel (0, 0), light in detected photons.
 */
export interface Spot {
  /** N, the fitted volume: detected photons under the spot. */
  readonly photons: number;
  readonly centre: readonly [x: number, y: number];
  /** Σ, µm². */
  readonly covariance: Covariance;
  /** B, photons per pixel. */
  readonly background: number;
  /**
   * Covariance of the estimates in the order N, x, y, Σxx, Σxy, Σyy, B (map) or N, x, Σxx, B (trace):
   * the inverse Fisher matrix, row-major.
   */
  readonly uncertainty: Float64Array;
  /** Pearson's χ² of the fit over its degrees of freedom. */
  readonly reducedChi2: number;
  /** Pixels left out as hot or struck by a cosmic ray. */
  readonly outliers: number;
}
