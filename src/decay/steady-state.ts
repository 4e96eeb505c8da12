import { gaussLegendre } from "./gauss-legendre.ts";

/** One place of a Gaussian spot under repeated pulses, densities in units of n₀. */
export interface SteadyState {
  /** ν, just after a pulse. */
  readonly density: number;
  readonly densityByTau: number;
  readonly densityByRate: number;
  /** Such that Σ weight[q − 1]·n^q over places is the spot's light ∝ n^q, 1 for a pulse that none went before. */
  readonly weight: readonly [number, number];
}

/**
 * The density just after a pulse once leftovers repeat, at places where one pulse adds y·n₀.
 *
 * With E = e^(−T/τ) and c = k n₀ τ (1 − E) the density ν (in n₀) just after a pulse is what the pulse adds and what
 * the last period left: ν = y + ν E/(1 + c ν), a quadratic with the positive root
 *
 *     ν = 2y/(b + √(b² + 4 c y)) ,  b = 1 − E − c y .
 *
 * A Gaussian's area between y and y + dy is ∝ dy/y, so light ∝ n^q is q·∫₀¹ n^q/y dy; y is taken at Gauss–Legendre
 * points on panels that narrow towards 0.
 */
export function steadyState(tau: number, rate: number, period: number): SteadyState[] {
  const e = Math.exp(-period / tau);
  const eByTau = (e * period) / (tau * tau);
  const c = rate * tau * (1 - e);
  const cByTau = rate * (1 - e) - rate * tau * eByTau;
  const cByRate = tau * (1 - e);
  return PLACES.map(({ y, weight }) => {
    const b = 1 - e - c * y;
    const root = Math.sqrt(Math.max(0, b * b + 4 * c * y));
    const density = b > 0 ? (2 * y) / (b + root) : (root - b) / (2 * c);
    // F(ν) = c ν² + b ν − y = 0, differentiated.
    const byC = (density * y - density * density) / root;
    const byE = density / root;
    return {
      density,
      densityByTau: byC * cByTau + byE * eByTau,
      densityByRate: byC * cByRate,
      weight: [weight / y, (2 * weight) / y],
    };
  });
}

const PLACES = [1 / 4, 1 / 16, 1 / 64, 0].flatMap((from, k) => {
  const to = 4 ** -k;
  const { points, weights } = gaussLegendre(5);
  return points.map((x, j) => ({ y: from + (to - from) * x, weight: (to - from) * weights[j]! }));
});
