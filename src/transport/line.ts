import { invertSymmetric } from "../numerics/linear-algebra.ts";
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
  /** Standardised residuals of each frame's components, whitened by the frame's covariance. */
  readonly residuals: readonly (readonly number[])[];
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
  const components = widths[0]?.variance.length ?? 1;
  const n = 2 * components;
  const normal = new Float64Array(n * n);
  const right = new Float64Array(n);
  const inverses = widths.map((width) => inverted(width.covariance, components));
  for (const [i, width] of widths.entries()) {
    const weight = inverses[i]!;
    const t = 2 * width.time;
    for (let a = 0; a < components; a++) {
      for (let b = 0; b < components; b++) {
        const w = weight[a * components + b]!;
        const y = width.variance[b]!;
        right[a]! += w * y;
        right[components + a]! += w * t * y;
        normal[a * n + b]! += w;
        normal[a * n + components + b]! += w * t;
        normal[(components + a) * n + b]! += w * t;
        normal[(components + a) * n + components + b]! += w * t * t;
      }
    }
  }
  if (!invertSymmetric(normal, n)) return null;
  const theta = Array.from({ length: n }, (_, a) =>
    right.reduce((sum, r, b) => sum + normal[a * n + b]! * r, 0),
  );
  const intercept = theta.slice(0, components);
  const diffusion = theta.slice(components);

  let chi2 = 0;
  const residuals = widths.map((width, i) => {
    const residual = width.variance.map((value, a) => value - intercept[a]! - 2 * diffusion[a]! * width.time);
    const weight = inverses[i]!;
    for (let a = 0; a < components; a++) {
      for (let b = 0; b < components; b++) chi2 += residual[a]! * weight[a * components + b]! * residual[b]!;
    }
    return residual.map((value, a) => value / Math.sqrt(width.covariance[a * components + a]!));
  });
  return {
    intercept,
    diffusion,
    covariance: normal,
    chi2,
    degreesOfFreedom: widths.length * components - n,
    residuals,
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
