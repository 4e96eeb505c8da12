// The Cramér–Rao bound of D, τ and L of a plain scenario by the widths' road, as variances.
import { widthsPrecision } from "../dist/outcome/precision.js";

/** @returns variances of D (cm²/s)², τ ns², L µm² */
export function boundsAtTruth(scenario, mean) {
  const bound = widthsPrecision(scenario, mean);
  if (bound === null) throw new Error("no bound: the light does not determine D and τ");
  return { d: 100 * bound.diffusion.u ** 2, tau: bound.lifetime.u ** 2, length: bound.length.u ** 2 };
}
