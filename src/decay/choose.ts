import { akaikeWeights, birgeFactor } from "../numerics/model-choice.ts";
import type { DecayFit, DecayLaw } from "./light.ts";

/** How many times likelier, by corrected Akaike weight, a law must be to displace a more modest one. */
const CLEARLY = 10;

/** χ² this improbable counts as noise underestimated, or laws that all miss something. */
const DOUBTFUL = 0.01;

export interface Choice {
  readonly preferred: DecayLaw;
  /** Corrected Akaike weights among the usable laws, summing to 1. */
  readonly weights: Record<DecayLaw, number>;
  /** Other laws, besides one exponential, with at least a tenth of the weight of a preferred richer law. */
  readonly rivals: readonly DecayLaw[];
  /**
   * How far apart the preferred law and its rivals put ∫ survival dt, ns: √Σ w(⟨τ⟩ − ⟨τ⟩_preferred)², w their weights
   * among themselves. In quadrature with u it is the uncertainty that allows for the choice of law (Burnham and
   * Anderson, section 4.3.2); 0 without rivals.
   */
  readonly lawSpread: number;
}

/**
 * Chooses among the laws by corrected Akaike weight exp(−AICc/2) (Burnham and Anderson, Model Selection and Multimodel
 * Inference, 2nd ed. (2002), sections 2.4 and 2.9), the modest law first:
 *
 * - One exponential stands unless a richer law has ten times its weight. An Akaike weight alone would take a richer law
 *   in several per cent of recordings of a pure exponential, just those in which noise imitates it, and τ would be
 *   biased and its interval wide there. Ten times means that χ² falls by about 6.6 for one parameter more and by 8.6
 *   for two, which noise does in about one recording in a hundred.
 * - Two exponentials and the stretched one describe; annihilation claims a cause, and its τ is another quantity, the
 *   lifetime that a fainter spot would have. It is preferred only with ten times the weight of either description.
 *   Short of that the description is given, its rival named; ∫ survival dt is nearly the same under both.
 *
 * Where even the law that fits best has an improbable χ² (p < 0.01), every χ² is divided by that law's χ²/ν before
 * weighing (the quasi-likelihood form, same source, section 2.5): underestimated noise must not buy parameters.
 *
 * Laws that did not converge, or that cannot be told from a simpler one, weigh nothing.
 */
export function chooseLaw(fits: Record<DecayLaw, DecayFit | null>): Choice {
  const weights = weigh(Object.values(fits).filter((fit): fit is DecayFit => fit?.converged === true));
  const describing = weights.stretched > weights.two_exponentials ? "stretched" : "two_exponentials";
  const richer = weights.annihilation >= CLEARLY * weights[describing] ? "annihilation" : describing;
  const heaviest = Math.max(weights.annihilation, weights[describing]);
  if (heaviest === 0 || heaviest < CLEARLY * weights.exponential) {
    return { preferred: "exponential", weights, rivals: [], lawSpread: 0 };
  }
  const rivals = (["two_exponentials", "stretched", "annihilation"] as const).filter(
    (law) => law !== richer && weights[law] * CLEARLY > weights[richer],
  );
  return { preferred: richer, weights, rivals, lawSpread: spreadOf(fits, weights, richer, rivals) };
}

function spreadOf(
  fits: Record<DecayLaw, DecayFit | null>,
  weights: Record<DecayLaw, number>,
  preferred: DecayLaw,
  rivals: readonly DecayLaw[],
): number {
  const mean = (law: DecayLaw) => fits[law]!.amplitudeAveraged.value;
  const total = rivals.reduce((sum, law) => sum + weights[law], weights[preferred]);
  const square = rivals.reduce((sum, law) => sum + weights[law] * (mean(law) - mean(preferred)) ** 2, 0);
  return Math.sqrt(square / total);
}

function weigh(usable: readonly DecayFit[]): Record<DecayLaw, number> {
  const weights = { exponential: 0, two_exponentials: 0, stretched: 0, annihilation: 0 };
  if (usable.length === 0) return weights;
  const spread = overdispersion(usable);
  const scores = usable.map((fit) => fit.aicc - fit.chi2 + fit.chi2 / spread);
  akaikeWeights(scores).forEach((weight, k) => {
    weights[usable[k]!.law] = weight;
  });
  return weights;
}

function overdispersion(usable: readonly DecayFit[]): number {
  const best = usable.reduce((a, b) => (b.pValue > a.pValue ? b : a));
  return birgeFactor(best.chi2, best.degreesOfFreedom, DOUBTFUL) ** 2;
}
