import type { StackFits } from "../field/stack-fit/candidates.ts";
import { fitStack } from "../field/stack-fit/fit-stack.ts";
import { CANDIDATES, namesOf, type Symmetry, type Values } from "../field/stack-fit/parameters.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";
import { correctedAkaike } from "../numerics/model-choice.ts";
import type { Sign } from "./evidence.ts";
import { describes } from "./field-quantities.ts";

/** Standard uncertainties from which a spot is visibly no Gaussian. */
const VISIBLY = 4;
/** How much lower in corrected Akaike units a start with a foot must lie for each of its two parameters, as a candidate. */
const PRICE = 4;

/**
 * Fits of a whole stack whose start is visibly no Gaussian from the first frames on: all candidates once more with two
 * Gaussians of one centre as the start, where plain diffusion from there is better than the best from a Gaussian, or
 * that one does not describe the recording. A core on a foot from the beginning is no work of traps, and a flat top
 * none of annihilation.
 *
 * @param plain the candidates from a Gaussian start
 * @param shape q of the first frames, see `shapeScore`
 * @param fitAll fits all candidates
 * @returns `plain` where it is as good
 */
export function withFoot(
  data: StackData,
  symmetry: Symmetry,
  start: Values,
  shape: Sign,
  plain: StackFits | null,
  fitAll: (symmetry: Symmetry, start: Values) => StackFits | null,
): StackFits | null {
  if (Math.abs(shape.value) < VISIBLY * shape.u) return plain;
  const footed = { ...symmetry, footed: true };
  const from = { ...start, ...footOf(shape.value) };
  if (plain !== null && describes(plain.preferred) && !isBetter(data, footed, from, plain)) return plain;
  const fits = fitAll(footed, from);
  if (fits === null || !fits.preferred.converged) return plain;
  if (plain === null || !plain.preferred.converged) return fits;
  return fits.preferred.aicc < plain.preferred.aicc - 2 * PRICE ? fits : plain;
}

/** Whether the first frames visibly show a core on a foot. */
export function standsOnFoot({ value, u }: Sign): boolean {
  return value >= VISIBLY * u;
}

function footOf(shape: number): Values {
  return shape > 0 ? { foot_share: 0.3, foot_ratio: 2.5 } : { foot_share: 1.3, foot_ratio: 2 };
}

function isBetter(data: StackData, symmetry: Symmetry, start: Values, { preferred }: StackFits): boolean {
  const names = namesOf(data.kind, CANDIDATES[0]!, symmetry);
  const fit = fitStack(data, names, start);
  const pixels = data.frames.reduce((sum, { patch }) => sum + patch.data.length, 0);
  return fit.converged && correctedAkaike(fit.deviance, names.length, pixels) < preferred.aicc - 2 * PRICE;
}
