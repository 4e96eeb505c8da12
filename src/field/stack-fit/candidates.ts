import { akaikeWeights, correctedAkaike } from "../../numerics/model-choice.ts";
import type { StackOptimum } from "./fit-stack.ts";
import { fitStack } from "./fit-stack.ts";
import type { Goodness } from "./goodness.ts";
import { goodnessOf } from "./goodness.ts";
import type { Candidate, Name, Symmetry, Values } from "./parameters.ts";
import { CANDIDATES, namesOf, valuesOf } from "./parameters.ts";
import type { StackData } from "./stack-data.ts";

export interface CandidateFit extends StackOptimum {
  readonly candidate: Candidate;
  readonly goodness: Goodness;
  readonly aicc: number;
  /** Corrected Akaike weight among the converged candidates. */
  readonly weight: number;
}

export interface StackFits {
  readonly fits: readonly CandidateFit[];
  readonly preferred: CandidateFit;
  readonly symmetry: Symmetry;
}

/** How much lower, in corrected Akaike units, a richer candidate must lie for each parameter that it adds. */
const PRICE = 4;

/**
 * Fits the candidates of a whole stack (diffusion; with annihilation; with capture; with both; where excitons are known
 * to be dipolar, with repulsion, and with repulsion and annihilation) and chooses: a richer candidate must beat every
 * poorer one by 4 corrected Akaike units a parameter beyond the criterion's own price, so that plain stacks keep the
 * plain model in more than 95 % of cases (for one parameter chance gives a fall of χ² by 6 in 1.4 %, for two by 12 in
 * 0.2 %).
 *
 * Caught excitons are taken to shine like free ones (ε = 1): the light tells λ = 1/τ + c and ε·c, not the three apart.
 *
 * @returns null where no candidate can be fitted at all
 * @param start values of plain diffusion, from widths and decay
 * @param hint k·n₀ by the decay of the light, 1/ns, where it gives one
 * @param repulsion β to start from, where excitons are known to be dipolar
 * @param onCandidate told before each fit
 */
export function fitCandidates(
  data: StackData,
  symmetry: Symmetry,
  start: Values,
  hint: number | null,
  repulsion: number | null = null,
  onCandidate: (name: Candidate["name"]) => void = () => {},
): StackFits | null {
  const found: Omit<CandidateFit, "weight">[] = [];
  const pixels = data.frames.reduce((sum, { patch }) => sum + patch.data.length, 0);
  for (const candidate of CANDIDATES) {
    if (candidate.repulsion && repulsion === null) continue;
    if (candidate.annihilation && (candidate.capture || candidate.repulsion) && !eitherGains(found)) continue;
    // a foot that plain diffusion finds no end for is not what the recording shows: a lump, a second spot
    if (symmetry.footed === true && found[0]?.converged === false) break;
    onCandidate(candidate.name);
    const names = namesOf(data.kind, candidate, symmetry);
    const starts = startsOf(candidate, start, { annihilation: hint, repulsion: repulsion ?? 0 }, found);
    const tries = isDescribed(found) ? starts.slice(0, 1) : starts;
    const best = fitFrom(data, names, tries, toBeat(candidate, found));
    if (best === null) continue;
    found.push({
      ...best,
      candidate,
      goodness: goodnessOf(data, names, best.parameters),
      aicc: correctedAkaike(best.deviance, names.length, pixels),
    });
  }
  if (found.length === 0) return null;
  const usable = found.filter((fit) => fit.converged);
  const weights = akaikeWeights(usable.map((fit) => fit.aicc));
  const fits = found.map((fit) => ({ ...fit, weight: weights[usable.indexOf(fit)] ?? 0 }));
  return { fits, preferred: prefer(fits), symmetry };
}

/** The first start's fit that converges, else the best; null where none can be fitted. */
function fitFrom(
  data: StackData,
  names: readonly Name[],
  starts: readonly Values[],
  toBeat: number,
): StackOptimum | null {
  let best: StackOptimum | null = null;
  for (const start of starts) {
    const fit = tryFit(data, names, start, toBeat);
    if (fit !== null && (best === null || fit.converged || fit.deviance < best.deviance)) best = fit;
    if (best?.converged) break;
  }
  return best;
}

/** Where a simpler model describes the recording, a richer one that adds to it is found from its best start or not at all. */
function isDescribed(found: readonly Omit<CandidateFit, "weight">[]): boolean {
  return found.some((fit) => fit.converged && fit.goodness.pValue > DESCRIBED);
}

const DESCRIBED = 0.05;

/** A fit with traps goes on only while it may gain this much over simpler ones: χ² with two more parameters. */
const WORTH_A_FIT = 4;

/** Whether one process alone is worth anything over plain diffusion: if none is, two together are not fitted. */
function eitherGains(found: readonly Omit<CandidateFit, "weight">[]): boolean {
  const plain = found.find((fit) => fit.candidate.name === "diffusion");
  return plain === undefined || found.some((fit) => fit.deviance < plain.deviance - WORTH_A_FIT);
}

function toBeat({ capture }: Candidate, found: readonly Omit<CandidateFit, "weight">[]): number {
  if (!capture) return Number.POSITIVE_INFINITY;
  return Math.min(...found.filter((fit) => fit.converged).map((fit) => fit.deviance)) - WORTH_A_FIT;
}

/** Null where no light follows from the start or from where the fit is led: that candidate is no candidate. */
export function tryFit(
  data: StackData,
  names: readonly Name[],
  start: Values,
  toBeat: number,
): StackOptimum | null {
  try {
    return fitStack(data, names, start, toBeat);
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
}

/** A rate below zero is nothing that could happen: what such a fit gains is chance. */
function isPossible({ names, parameters }: CandidateFit): boolean {
  return ["k_n0", "capture", "repulsion"].every((name) => {
    const i = (names as readonly string[]).indexOf(name);
    return i < 0 || parameters[i]! >= 0;
  });
}

function prefer(fits: readonly CandidateFit[]): CandidateFit {
  let best = fits[0]!;
  for (const fit of fits.slice(1)) {
    if (!fit.converged || !isPossible(fit)) continue;
    const price = PRICE * (fit.names.length - best.names.length);
    if (!best.converged || fit.aicc < best.aicc - price) best = fit;
  }
  return best;
}

/** Starts of a candidate from the plain fit or the fit before it. */
function startsOf(
  candidate: Candidate,
  start: Values,
  hints: { readonly annihilation: number | null; readonly repulsion: number },
  found: readonly Omit<CandidateFit, "weight">[],
): Values[] {
  const before = (name: Candidate["name"]): Values | null => {
    const fit = found.find((each) => each.candidate.name === name);
    return fit === undefined ? null : valuesOf(fit.names, fit.parameters);
  };
  const plain = before("diffusion") ?? start;
  const tau = plain.tau!;
  const moving = (base: Values, factor: number): Values =>
    ({
      ...base,
      D: base.D === undefined ? undefined : base.D * factor,
      D_xx: base.D_xx === undefined ? undefined : base.D_xx * factor,
      D_xy: base.D_xy === undefined ? undefined : base.D_xy * factor,
      D_yy: base.D_yy === undefined ? undefined : base.D_yy * factor,
    }) as Values;
  const trapped = (base: Values, share: number, life: number): Values => ({
    ...moving(base, 1 + share),
    capture: share / tau,
    trap_lifetime: life * tau,
  });
  switch (candidate.name) {
    case "diffusion":
      return [start];
    case "annihilation":
      return [{ ...plain, k_n0: hints.annihilation ?? 0.2 / tau }];
    case "capture":
      return [trapped(plain, 0.3, 1.5), trapped({ ...plain, tau: tau / 2 }, 0.6, 4)];
    case "annihilation_and_capture": {
      const capture = found.find((fit) => fit.candidate.name === "capture" && fit.converged);
      const annihilation = before("annihilation");
      return [
        ...(capture === undefined
          ? []
          : [{ ...valuesOf(capture.names, capture.parameters), k_n0: 0.05 / tau }]),
        ...(annihilation === null ? [] : [trapped(annihilation, 0.2, 2)]),
      ];
    }
    case "repulsion":
      // plain diffusion reads some mean of D(1 + β/4), as it begins, and D, as it ends
      return [{ ...moving(plain, 1 / (1 + hints.repulsion / 8)), repulsion: hints.repulsion }];
    case "annihilation_and_repulsion": {
      const [repulsion, annihilation] = [before("repulsion"), before("annihilation")];
      return [
        ...(repulsion === null ? [] : [{ ...repulsion, k_n0: 0.1 / tau }]),
        ...(annihilation === null ? [] : [{ ...annihilation, repulsion: 0.3 }]),
      ];
    }
  }
}
