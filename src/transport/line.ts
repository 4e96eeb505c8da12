import { invertSymmetric } from "../numerics/linear-algebra.ts";
import { fitLinear } from "../numerics/linear-fit.ts";
import type { Width } from "./width.ts";

/** Σ(t) = Σ₀ + 2Dt for every component of Σ at once. */
export interface LineFit {
  /** Σ₀, µm², one entry a component (xx, xy, yy or xx). */
  readonly intercept: readonly number[];
  /** D, µm²/ns, the same components. */
  readonly diffusion: readonly number[];
  /** Covariance of (intercept…, diffusion…), row-major. */
  readonly covariance: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
}

/**
 * Generalised least squares of the tensor line Σ(t) = Σ₀ + 2Dt with a free intercept (Aitken 1936): frames are
 * independent, the three components of one frame are correlated, θ = (XᵀV⁻¹X)⁻¹XᵀV⁻¹y.
 *
 * The intercept holds the point-spread function, the excitation spot and the pixel; none of them is subtracted. D may
 * come out negative.
 *
 * @returns null where the widths do not determine a line (fewer than two distinct times)
 */
export function fitLine(widths: readonly Width[]): LineFit | null {
  if (new Set(widths.map((width) => width.time)).size < 2) return null;
  const components = widths[0]!.variance.length;
  const rows = widths.length * components;
  const design = Array.from({ length: 2 * components }, () => new Float64Array(rows));
  for (const [i, { time }] of widths.entries()) {
    for (let a = 0; a < components; a++) {
      design[a]![i * components + a] = 1;
      design[components + a]![i * components + a] = 2 * time;
    }
  }
  const fit = fitLinear({
    design,
    y: widths.flatMap((width) => width.variance),
    precision: widths.map((width) => inverted(width.covariance, components)),
  });
  return {
    intercept: fit.parameters.slice(0, components),
    diffusion: fit.parameters.slice(components),
    covariance: fit.covariance,
    chi2: fit.chi2,
    degreesOfFreedom: fit.degreesOfFreedom,
  };
}

function inverted(covariance: Float64Array, n: number): Float64Array {
  const inverse = covariance.slice();
  if (!invertSymmetric(inverse, n)) throw new RangeError("a width's covariance must be positive definite");
  return inverse;
}

/** Scalar diffusion coefficient of a line, trace over dimension, with its variance; µm²/ns. */
export function meanDiffusion(line: LineFit): { value: number; variance: number } {
  const components = line.intercept.length;
  if (components === 1) return { value: line.diffusion[0]!, variance: line.covariance[3]! };
  const c = (i: number, j: number): number => line.covariance[(3 + i) * 6 + 3 + j]!;
  return {
    value: (line.diffusion[0]! + line.diffusion[2]!) / 2,
    variance: (c(0, 0) + c(2, 2) + 2 * c(0, 2)) / 4,
  };
}
