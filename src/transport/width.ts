/** One frame's width as the laws of spread see it; µm² and ns. */
export interface Width {
  /** Index of the frame in the stack. */
  readonly frame: number;
  /** Middle of the gate, ns after the pulse. */
  readonly time: number;
  /** Σxx, Σxy, Σyy of a map; Σxx alone of a trace. */
  readonly variance: readonly number[];
  /** Their covariance, row-major 3×3 or 1×1, from the smooth models (not from the frame's own fit). */
  readonly covariance: Float64Array;
}

/** Variance per axis: half the trace of Σ on a map, Σxx on a trace. */
export function perAxis(width: Pick<Width, "variance">): number {
  return width.variance.length === 3 ? (width.variance[0]! + width.variance[2]!) / 2 : width.variance[0]!;
}

/** The variance of {@link perAxis}. */
export function perAxisVariance(width: Width): number {
  const c = width.covariance;
  return width.variance.length === 3 ? (c[0]! + c[8]! + 2 * c[2]!) / 4 : c[0]!;
}
