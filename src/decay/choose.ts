import { akaikeWeights, birgeFactor } from "../numerics/model-choice.ts";
import type { DecayFit, DecayLaw } from "./light.ts";

/** How many times likelier than one exponential a richer law must be, by corrected Akaike weight, to be preferred. */
const CLEARLY = 10;

/** χ² this improbable counts as noise underestimated, or laws that all miss something. */
const DOUBTFUL = 0.01;

export interface Choice {
  readonly preferred: DecayLaw;
  readonly weights: Record<DecayLaw, number>;
}

/**
 * Chooses among the laws by corrected Akaike weight exp(−AICc/2) (Burnham and Anderson, Model Selection and Multimodel
 * Inference, 2nd ed. (2002), sections 2.4 and 2.9).
 *
 * One exponential stands unless a richer law has ten times its weight: an Akaike weight alone would take a richer law
 * in several per cent of recordings of a pure exponential, just those in which noise imitates it, and τ would be
 * biased and its interval wide there. Ten times means that χ² falls by about 6.6 for one parameter more and by 8.6
 * for two, which noise does in about one recording in a hundred. Among the richer laws the heavier one wins.
 *
 * Where even the law that fits best has an improbable χ² (p < 0.01), every χ² is divided by that law's χ²/ν before
 * weighing (the quasi-likelihood form, same source, section 2.5): underestimated noise must not buy parameters.
 *
 * Laws that did not converge, or that cannot be told from a simpler one, weigh nothing.
 */
export function chooseLaw(fits: Record<DecayLaw, DecayFit | null>): Choice {
  const usable = Object.values(fits).filter((fit): fit is DecayFit => fit?.converged === true);
  const weights: Record<DecayLaw, number> = {
    exponential: 0,
    two_exponentials: 0,
    stretched: 0,
    annihilation: 0,
  };
  if (usable.length === 0) return { preferred: "exponential", weights };
  const spread = overdispersion(usable);
  const scores = usable.map((fit) => fit.aicc - fit.chi2 + fit.chi2 / spread);
  akaikeWeights(scores).forEach((weight, k) => {
    weights[usable[k]!.law] = weight;
  });
  const heaviest = usable.reduce((best, fit) => (weights[fit.law] > weights[best.law] ? fit : best)).law;
  const plainStands =
    fits.exponential?.converged === true && weights[heaviest] < CLEARLY * weights.exponential;
  return { preferred: plainStands ? "exponential" : heaviest, weights };
}

function overdispersion(usable: readonly DecayFit[]): number {
  const best = usable.reduce((a, b) => (b.pValue > a.pValue ? b : a));
  return birgeFactor(best.chi2, best.degreesOfFreedom, DOUBTFUL) ** 2;
}
