import { accumulation } from "./exponential.ts";
import type { Instrument } from "./instrument.ts";
import type { DecayFit, LightData } from "./light.ts";
import { type LifetimeRange, lifetimeGrid } from "./starts.ts";

/** What AICc charges for one parameter, at the least. */
const CHARGE = 2;

/**
 * Whether a law richer than one exponential could earn its parameters.
 *
 * Two exponentials, the stretched exponential with β ≤ 1 and annihilation are all mixtures of exponentials with
 * positive weights (completely monotone functions). Mixtures are a convex set, so where no further exponential added
 * with a positive share lowers χ², none of the three laws can lie below the exponential's minimum (the gradient
 * condition of Lindsay, Ann. Statist. 11 (1983) 86). Otherwise the score test tells how far χ² falls by the best one:
 * (φᵀr)²/|φ⊥|², φ the added light and φ⊥ its part outside of what a change of A and τ can do, all over sigma. Where
 * that is less than 2, what AICc charges for one parameter, no richer law can outweigh the exponential, and none is
 * fitted.
 */
export function richerLawCouldPay(
  data: LightData,
  instrument: Instrument,
  exponential: DecayFit,
  range: LifetimeRange,
): boolean {
  if (!exponential.converged) return true;
  const { sigma, light, emissionOrder } = data;
  const whiten = (column: ArrayLike<number>) => Float64Array.from(column, (x, i) => x / sigma[i]!);
  const residuals = whiten(exponential.prediction.map((x, i) => light[i]! - x));
  const amplitude = unit(whiten(exponential.jacobian[0]!));
  const lifetime = unit(without(whiten(exponential.jacobian[1]!), amplitude));
  const tau = exponential.parameters[1]!;
  const column = new Float64Array(instrument.frames);
  const slope = new Float64Array(instrument.frames);
  return [...lifetimeGrid(range), tau / 2, tau / 1.3, tau * 1.3, tau * 2].some((added) => {
    instrument.exponential(emissionOrder / added, column, slope);
    const phi = whiten(
      column.map((x) => x * accumulation(1 / added, instrument.period).gain ** emissionOrder),
    );
    const score = dot(phi, residuals);
    if (!(score > 0)) return false;
    const rest = without(without(phi, amplitude), lifetime);
    const left = dot(rest, rest);
    return left > 1e-12 * dot(phi, phi) && score * score >= CHARGE * left;
  });
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

function unit(a: Float64Array): Float64Array {
  const length = Math.sqrt(dot(a, a)) || 1;
  return a.map((x) => x / length);
}

/** a without its part along the unit vector e. */
function without(a: Float64Array, e: Float64Array): Float64Array {
  const along = dot(a, e);
  return a.map((x, i) => x - along * e[i]!);
}
