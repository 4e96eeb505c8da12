/** χ² over its degrees of freedom from which a scatter is worth following. */
const WORTH_FOLLOWING = 4;

/**
 * A smooth course through a quantity that hardly changes from frame to frame (the spot's centre, the background): a
 * constant where that describes the values, else a straight line, else the values themselves.
 *
 * A reference that follows each frame's own fluctuation would bring a bias of one over the frame's photons; a wrong
 * constant one of the squared error. So the simplest course that the data allow at the 1 % level is taken, and the
 * values themselves only where they scatter by four times their variance: below that following them costs more than
 * it mends, and in faint frames it feeds on itself.
 *
 * @param times abscissa
 * @param values one a frame, NaN where there is none
 * @param variances of the values
 * @param fits whether χ² on so many degrees of freedom is acceptable
 */
export function steadyCourse(
  times: ArrayLike<number>,
  values: ArrayLike<number>,
  variances: ArrayLike<number>,
  fits: (chi2: number, degreesOfFreedom: number) => boolean,
): {
  readonly kind: "constant" | "line" | "own";
  readonly slope: number;
  readonly slopeU: number;
  at(index: number): number;
} {
  let w0 = 0;
  let wt = 0;
  let wtt = 0;
  let wy = 0;
  let wty = 0;
  let count = 0;
  const origin = times[0]!;
  for (let i = 0; i < values.length; i++) {
    if (!Number.isFinite(values[i]!)) continue;
    const w = 1 / variances[i]!;
    const t = times[i]! - origin;
    w0 += w;
    wt += w * t;
    wtt += w * t * t;
    wy += w * values[i]!;
    wty += w * t * values[i]!;
    count++;
  }
  const mean = wy / w0;
  const determinant = w0 * wtt - wt * wt;
  const slope = determinant > 0 ? (w0 * wty - wt * wy) / determinant : 0;
  const intercept = (wy - slope * wt) / w0;
  const slopeU = determinant > 0 ? Math.sqrt(w0 / determinant) : Number.POSITIVE_INFINITY;
  const course = (line: boolean) => (index: number) =>
    line ? intercept + slope * (times[index]! - origin) : mean;
  const chi2 = (at: (index: number) => number): number => {
    let sum = 0;
    for (let i = 0; i < values.length; i++) {
      if (Number.isFinite(values[i]!)) sum += (values[i]! - at(i)) ** 2 / variances[i]!;
    }
    return sum;
  };
  const result = { slope, slopeU };
  const good = (sum: number, freedom: number): boolean =>
    fits(sum, freedom) || sum < WORTH_FOLLOWING * freedom;
  // a slope worth four standard deviations is a drift even where scatter hides it from χ²
  const steady = Math.abs(slope) < 4 * slopeU;
  if (steady && good(chi2(course(false)), count - 1))
    return { ...result, kind: "constant", at: course(false) };
  if (good(chi2(course(true)), count - 2)) return { ...result, kind: "line", at: course(true) };
  const fallback = course(true);
  return { ...result, kind: "own", at: (i) => (Number.isFinite(values[i]!) ? values[i]! : fallback(i)) };
}
