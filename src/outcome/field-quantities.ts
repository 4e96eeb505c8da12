import { travelled } from "../field/similar/travelled.ts";
import type { CandidateFit, StackFits } from "../field/stack-fit/candidates.ts";
import { meanDiffusionOf, type Name, problemOf, valuesOf } from "../field/stack-fit/parameters.ts";
import { naturalSize } from "../field/stack-fit/score-stack.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";
import { birgeFactor } from "../numerics/model-choice.ts";
import type { Input } from "../numerics/propagate.ts";
import { fieldIntervals, type Range, type Ranged } from "./field-intervals.ts";
import { quadratic } from "./joint.ts";

/** What the whole-stack fit says of the excitons themselves; µm and ns, counting uncertainties. */
export interface FieldQuantities {
  /** µm²/ns */
  readonly diffusion: Input;
  /** τ of free excitons, without annihilation and capture, ns. */
  readonly lifetime: Input;
  /** ½⟨x²⟩ where excitons end, µm². */
  readonly length2: Input;
  readonly birge: number;
  readonly ranges: ReadonlyMap<Ranged, Range>;
}

/** Below this probability of its χ² a whole-stack model does not describe the recording. */
export const FITS = 1e-3;

export function describes(fit: CandidateFit): boolean {
  return fit.converged && fit.goodness.pValue > FITS;
}

/** The factor on every u of a whole-stack fit whose rings scatter more than counting does. */
export function birgeOf({ goodness }: CandidateFit): number {
  return birgeFactor(goodness.chi2, goodness.degreesOfFreedom);
}

export function fieldQuantities(data: StackData, { preferred }: StackFits): FieldQuantities {
  const { names, parameters, covariance } = preferred;
  const birge = birgeOf(preferred);
  const uOf = (gradient: readonly number[]): number =>
    birge * Math.sqrt(Math.max(quadratic(gradient, covariance), 0));
  const d = meanDiffusionOf(names, parameters);
  return {
    diffusion: { value: d.value, u: uOf(d.gradient) },
    lifetime: {
      value: parameters[names.indexOf("tau")]!,
      u: uOf(names.map((name) => (name === "tau" ? 1 : 0))),
    },
    length2: {
      value: travelled(problemOf(data, valuesOf(names, parameters))),
      u: uOf(travelSlopes(data, names, parameters)),
    },
    birge,
    ranges: fieldIntervals(data, preferred, birge, describes(preferred)),
  };
}

/** ∂(½⟨x²⟩)/∂p by central differences; light, centre and background do not move excitons. */
export function travelSlopes(data: StackData, names: readonly Name[], p: Float64Array): number[] {
  const v = valuesOf(names, p);
  return names.map((name) => {
    if (["amplitude", "x", "y", "background", "trap_lifetime"].includes(name)) return 0;
    const h = 1e-3 * naturalSize(name, v);
    const at = (by: number): number => travelled(problemOf(data, { ...v, [name]: v[name]! + by }));
    return (at(h) - at(-h)) / (2 * h);
  });
}
