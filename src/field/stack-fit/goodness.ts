import { pixelVariance } from "../../frame/patch.ts";
import { chiSquareUpperTail } from "../../numerics/distributions.ts";
import type { Name } from "./parameters.ts";
import { valuesOf } from "./parameters.ts";
import { deviance } from "./score-stack.ts";
import type { StackData } from "./stack-data.ts";

export interface Goodness {
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly pValue: number;
}

/** Edges of the rings around the spot, in standard deviations of the frame's spot. */
const RINGS = [0.7, 1.2, 1.7, 2.3, 3.2] as const;
const GROUPS = 10;
/** What changes nothing in a ring around the centre; of xx and yy one is its width. */
const UNSEEN: readonly Name[] = ["x", "y", "s_xy", "s_yy", "D_xy", "D_yy"];

/**
 * Goodness of fit of a whole-stack model: the light in rings around the spot, in groups of neighbouring frames, against
 * the model's, as Pearson's χ². A single pixel holds too few photons to say anything about the model; a ring of a group
 * holds enough. The parameters that rings can see are counted off the degrees of freedom, which is exact only for fits
 * to these very cells (Chernoff and Lehmann, Ann. Math. Stat. 25 (1954) 579: the truth lies between counting them and
 * not); centre and ellipticity leave a ring's light as it is and are not counted.
 */
export function goodnessOf(data: StackData, names: readonly Name[], p: Float64Array): Goodness {
  const cells = RINGS.length + 1;
  const sums = new Float64Array(GROUPS * cells);
  const variances = new Float64Array(GROUPS * cells);
  const v = valuesOf(names, p);
  const { pixel, kind, noise } = data;
  deviance(data, names, p, (value, mean, k, index) => {
    const { patch, shift, variance } = data.frames[k]!;
    const { x0, y0, width } = patch.rectangle;
    const dx = (x0 + (index % width)) * pixel - v.x! - shift[0];
    const dy = kind === "map" ? (y0 + Math.floor(index / width)) * pixel - v.y! - shift[1] : 0;
    const reach = Math.sqrt((dx * dx + dy * dy) / variance);
    let ring = 0;
    while (ring < RINGS.length && reach > RINGS[ring]!) ring++;
    const at = Math.floor((k * GROUPS) / data.frames.length) * cells + ring;
    sums[at]! += value - mean;
    variances[at]! += pixelVariance(noise, mean);
  });
  let chi2 = 0;
  let used = 0;
  for (let c = 0; c < sums.length; c++) {
    if (variances[c]! < 10) continue;
    chi2 += sums[c]! ** 2 / variances[c]!;
    used++;
  }
  const seen = names.filter((name) => !UNSEEN.includes(name)).length;
  const degreesOfFreedom = Math.max(used - seen, 1);
  return { chi2, degreesOfFreedom, pValue: chiSquareUpperTail(chi2, degreesOfFreedom) };
}
