import { largestShare } from "../similar/foot.ts";
import type { Name } from "./parameters.ts";

/** Of the share of a foot that leaves no density at the centre. */
const MOST_SHARE = 0.98;
/** A ratio nearer to one is no foot, and a wider foot is background. */
const RATIOS = [1.1, 40] as const;
/** Longest steps: of the share, and the factor on the ratio. */
const SHARE_STEP = 0.25;
const RATIO_STEP = 1.6;

/** A core on a foot stays one, and a flat top a flat top: in between, at a share of one, the start is a Gaussian. */
export function keepFoot(names: readonly Name[], from: Float64Array, to: Float64Array): void {
  const [share, ratio] = [names.indexOf("foot_share"), names.indexOf("foot_ratio")];
  if (share < 0) return;
  const widest = Math.min(RATIO_STEP * from[ratio]!, RATIOS[1]);
  to[ratio] = Math.min(Math.max(to[ratio]!, from[ratio]! / RATIO_STEP, RATIOS[0]), widest);
  const flat = from[share]! >= 1;
  const [least, most] = flat ? [1, MOST_SHARE * largestShare(to[ratio]!)] : [0, 1];
  to[share] = Math.min(
    Math.max(to[share]!, from[share]! - SHARE_STEP, least),
    from[share]! + SHARE_STEP,
    most,
  );
}
