import { chiSquareUpperTail } from "./distributions.ts";

/**
 * The corrected Akaike criterion of a least-squares fit with known variances, χ² + 2k + 2k(k+1)/(n − k − 1), up to a
 * constant that all models of the same data share (Hurvich and Tsai, Biometrika 76 (1989) 297; Burnham and Anderson,
 * Model Selection and Multimodel Inference, 2nd ed. (2002), section 2.4).
 *
 * @param k number of fitted parameters
 * @param n number of points
 * @returns Infinity where n ≤ k + 1: too few points to tell
 */
export function correctedAkaike(chi2: number, k: number, n: number): number {
  if (n <= k + 1) return Number.POSITIVE_INFINITY;
  return chi2 + 2 * k + (2 * k * (k + 1)) / (n - k - 1);
}

/**
 * Akaike weights exp(−Δ/2)/Σ exp(−Δ/2) of models of the same data (Burnham and Anderson, section 2.9). A model with an
 * infinite criterion has weight 0; where all are infinite, all weights are 0.
 */
export function akaikeWeights(criteria: readonly number[]): number[] {
  const best = Math.min(...criteria);
  if (!Number.isFinite(best)) return criteria.map(() => 0);
  const likelihoods = criteria.map((value) => Math.exp((best - value) / 2));
  const total = likelihoods.reduce((sum, value) => sum + value, 0);
  return likelihoods.map((value) => value / total);
}

/**
 * The factor on every u of a fit whose χ² is significantly too large, √(χ²/ν), else 1 (Birge, Phys. Rev. 40 (1932)
 * 207). Scatter smaller than expected never shrinks an uncertainty.
 *
 * @param level a χ² is too large where its probability is below this
 */
export function birgeFactor(chi2: number, degreesOfFreedom: number, level = 0.01): number {
  if (degreesOfFreedom <= 0 || chiSquareUpperTail(chi2, degreesOfFreedom) >= level) return 1;
  return Math.max(1, Math.sqrt(chi2 / degreesOfFreedom));
}
