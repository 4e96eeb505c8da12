import jstat from "jstat";

/**
 * Distribution and special functions, by jStat. The accuracies stated are those measured against SciPy over the range
 * of the tests.
 */

/**
 * The probability of a χ² at least as large, on `degreesOfFreedom`; 1 where there are none.
 * Error below 1e-9 relative or 1e-16 absolute, up to 50,000 degrees of freedom.
 */
export function chiSquareUpperTail(chi2: number, degreesOfFreedom: number): number {
  if (degreesOfFreedom <= 0 || chi2 <= 0) return 1;
  if (chi2 === Number.POSITIVE_INFINITY) return 0;
  return Math.min(1, Math.max(0, 1 - jstat.chisquare.cdf(chi2, degreesOfFreedom)));
}

/** Φ(x), absolute error below 1e-15. */
export function normalCdf(x: number): number {
  return jstat.normal.cdf(x, 0, 1);
}

/** x with Φ(x) = p, 0 < p < 1; relative error below 1e-9. */
export function normalQuantile(p: number): number {
  return jstat.normal.inv(p, 0, 1);
}

/** t with P(T ≤ t) = p, 0 < p < 1; relative error below 1e-7. The normal's where the freedom is infinite. */
export function studentTQuantile(p: number, degreesOfFreedom: number): number {
  if (degreesOfFreedom === Number.POSITIVE_INFINITY) return normalQuantile(p);
  return jstat.studentt.inv(p, degreesOfFreedom);
}

/** erf(x), relative error below 1e-13. */
export function erf(x: number): number {
  return jstat.erf(x);
}

/** ln Γ(x) for x > 0, relative error below 1e-12. */
export function lnGamma(x: number): number {
  return jstat.gammaln(x);
}

/** Γ(x) for x > 0, relative error below 1e-11. (jStat's own gammafn is off by 3e-9 at 1/2.) */
export function gamma(x: number): number {
  return Math.exp(jstat.gammaln(x));
}
