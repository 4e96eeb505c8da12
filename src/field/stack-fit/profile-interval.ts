/** A likelihood with one quantity held at a value and everything else refitted. */
export interface Profile {
  /** Where the likelihood is largest, and the standard uncertainty by its curvature there. */
  readonly value: number;
  readonly u: number;
  /** What the quantity can be at all; an infinite end is none. */
  readonly lowest: number;
  readonly highest: number;
  /** "rate" for a lifetime, which is nearer to normal as 1/value; the interval itself does not depend on it. */
  readonly scale: "value" | "rate";
  /** How far −2 ln L rises over its least with the quantity held at x; null where no model follows there. */
  rise(x: number): number | null;
}

/** Null for an end that the data do not set: the rise stays below the level as far as the quantity can go. */
export type Interval = readonly [low: number | null, high: number | null];

/** The last trial's √rise is this near, in standard deviations; the chord from the best value goes the rest of the way. */
const CLOSE = 0.02;
const MOST_TRIALS = 10;
/** How much further than to the last trial the search may look at once. */
const REACH = 3;

/**
 * Interval by profile likelihood: the values at which −2 ln L, refitted over all other parameters, rises by no more than
 * `level` (Pawitan, In All Likelihood, 2001, sections 2.6 and 3.4): 3.841 for 95 %, times the variance factor where
 * scatter is larger than counting's (McCullagh and Nelder 1989, section 9.2.3).
 *
 * √rise is nearly straight in the quantity, so the end is sought by secants, within the nearest trials on both sides of
 * it once there are such.
 */
export function profileInterval(profile: Profile, level: number): Interval {
  const { scale } = profile;
  if (scale === "value") return [endOf(profile, -1, level), endOf(profile, 1, level)];
  // a lifetime by its rate: what is low there is high here
  const { value, u, lowest, highest } = profile;
  const rate: Profile = {
    value: 1 / value,
    u: u / value ** 2,
    lowest: 1 / highest,
    highest: 1 / lowest,
    scale: "value",
    rise: (x) => profile.rise(1 / x),
  };
  const [slow, fast] = profileInterval(rate, level);
  return [fast === null ? null : 1 / fast, slow === null ? null : 1 / slow];
}

/** A distance from the best value, with √rise − √level there. */
interface Trial {
  readonly at: number;
  readonly short: number;
}

function endOf({ value, u, lowest, highest, rise }: Profile, side: 1 | -1, level: number): number | null {
  const aim = Math.sqrt(level);
  const room = Math.max(side > 0 ? highest - value : value - lowest, 0);
  let near: Trial = { at: 0, short: -aim };
  let far: Trial | null = null;
  let at = Math.min(aim * u, room);
  for (let count = 0; count < MOST_TRIALS; count++) {
    const risen = rise(value + side * at);
    // where no model follows the quantity cannot be: a rise of any size
    const short = risen === null ? Number.POSITIVE_INFINITY : Math.sqrt(Math.max(risen, 0)) - aim;
    if (Math.abs(short) < CLOSE) return value + (side * at * aim) / (aim + short);
    if (short < 0 && at >= room) return null;
    const before = near;
    if (short < 0) near = { at, short };
    else far = { at, short };
    at = far === null ? Math.min(beyond(before, near), room) : within(near, far);
  }
  return far === null ? null : value + (side * (near.at + far.at)) / 2;
}

function beyond(before: Trial, last: Trial): number {
  const slope = (last.short - before.short) / (last.at - before.at);
  const wanted = slope > 0 ? last.at - last.short / slope : Number.POSITIVE_INFINITY;
  return Math.min(Math.max(wanted, 1.05 * last.at), REACH * last.at);
}

function within(near: Trial, far: Trial): number {
  if (!Number.isFinite(far.short)) return (near.at + far.at) / 2;
  return near.at - (near.short * (far.at - near.at)) / (far.short - near.short);
}
