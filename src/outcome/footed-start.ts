import { type StackFits, tryFit } from "../field/stack-fit/candidates.ts";
import { CANDIDATES, namesOf, type Symmetry, type Values } from "../field/stack-fit/parameters.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";
import { correctedAkaike } from "../numerics/model-choice.ts";
import type { Sign } from "./evidence.ts";
import { describes } from "./field-quantities.ts";

/** Standard uncertainties from which a spot is visibly no Gaussian. */
const VISIBLY = 4;
/** How much lower in corrected Akaike units a start with a foot must lie for each of its two parameters, as a candidate. */
const PRICE = 4;

/** Fits of all candidates with what they were fitted to; null where none could be fitted. */
interface Fitted {
  readonly data: StackData;
  readonly fits: StackFits | null;
}

/** Fits all candidates from a start of the given form. */
type FitAll = (data: StackData, symmetry: Symmetry, start: Values) => StackFits | null;

/**
 * Fits of a whole stack whose start is visibly no Gaussian from the first frames on: all candidates once more with two
 * Gaussians of one centre as the start, where plain diffusion from there is better than the best from a Gaussian, or
 * that one does not describe the recording. A core on a foot from the beginning is no work of traps, and a flat top
 * none of annihilation.
 *
 * @param gaussian the fits from a Gaussian start
 * @param shape q of the first frames, see `shapeScore`
 * @param ampleData the recording with more pixels around the spot: a foot is wider than what is read as its width
 * @returns `gaussian` where that is as good
 */
export function withFoot(
  gaussian: Fitted,
  symmetry: Symmetry,
  start: Values,
  shape: Sign,
  ampleData: () => StackData,
  fitAll: FitAll,
): Fitted {
  if (Math.abs(shape.value) < VISIBLY * shape.u) return gaussian;
  const footed = { ...symmetry, footed: true };
  const from = { ...start, ...footOf(shape.value) };
  const { fits: before } = gaussian;
  if (before !== null && describes(before.preferred) && !isBetter(gaussian.data, footed, from, before)) {
    return gaussian;
  }
  const data = shape.value > 0 ? ampleData() : gaussian.data;
  const fits = fitAll(data, footed, from);
  if (fits?.preferred.converged !== true) return gaussian;
  const rival = data === gaussian.data ? before : fitAll(data, symmetry, start);
  if (rival?.preferred.converged !== true) return { data, fits };
  return fits.preferred.aicc < rival.preferred.aicc - 2 * PRICE ? { data, fits } : gaussian;
}

function footOf(shape: number): Values {
  return shape > 0 ? { foot_share: 0.3, foot_ratio: 2.5 } : { foot_share: 1.3, foot_ratio: 2 };
}

function isBetter(data: StackData, symmetry: Symmetry, start: Values, { preferred }: StackFits): boolean {
  const names = namesOf(data.kind, CANDIDATES[0]!, symmetry);
  const fit = tryFit(data, names, start, preferred.deviance);
  const pixels = data.frames.reduce((sum, { patch }) => sum + patch.data.length, 0);
  return (
    fit?.converged === true &&
    correctedAkaike(fit.deviance, names.length, pixels) < preferred.aicc - 2 * PRICE
  );
}
