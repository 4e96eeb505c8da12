import type { CandidateFit } from "../field/stack-fit/candidates.ts";
import { endlessLifetime } from "../field/stack-fit/endless.ts";
import { type HeldFit, heldFit } from "../field/stack-fit/held-fit.ts";
import { meanDiffusionOf, type Name } from "../field/stack-fit/parameters.ts";
import { type Interval, profileInterval } from "../field/stack-fit/profile-interval.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";

/** The quantities of the whole-stack fit that get an interval. */
export type Ranged = "D" | "tau" | "repulsion" | "k_n0" | "capture" | "trap_lifetime";
const RANGED: readonly Ranged[] = ["D", "tau", "repulsion", "k_n0", "capture", "trap_lifetime"];

export interface Range {
  /** 95 %; null for an end that the data do not set. */
  readonly ends: Interval;
  /** Whether the interval is the likelihood's profile and not value ± 1.96 u. */
  readonly profiled: boolean;
}

/** 95 % of χ² with one degree of freedom. */
const LEVEL = 3.841458820694124;
const HALF = Math.sqrt(LEVEL);
/** Where all are known to this part of themselves, the likelihood is normal: it bends by some u/value over its width. */
const SHARP = 0.01;
/** How far −2 ln L at the ends of value ± 1.96 u may be from a normal likelihood's, relatively. */
const NORMAL = 0.1;
/** A profile's interval this near value ± 1.96 u, relatively to 1.96 u, is the same. */
const SAME = 0.05;
/** Nothing is looked for beyond this: rates in units of 1/τ or of one over the recording's length, and lifetimes. */
const ENDLESS = 100;

/**
 * The 95 % intervals of the preferred fit: value ± 1.96 u where −2 ln L at both ends is a normal likelihood's within 10 %
 * along the line on which that one has its least rise, or where all are known so well that it must be; else by the profile
 * of the likelihood (see `profileInterval`). A model that does not describe the recording has no likelihood worth the
 * search: value ± 1.96 u.
 *
 * @param described whether the fit describes the recording
 * @param birge factor on u; its square is the factor on the level
 */
export function fieldIntervals(
  data: StackData,
  fit: CandidateFit,
  birge: number,
  described: boolean,
): ReadonlyMap<Ranged, Range> {
  const found = new Map<Ranged, Range>();
  if (!fit.converged) return found;
  const held = RANGED.flatMap((name) => {
    const gradient = gradientOf(fit.names, name, fit.parameters);
    return gradient.every((g) => g === 0) ? [] : [{ name, of: heldFit(data, fit, gradient) }];
  });
  const sharp = held.every(({ of: { value, u } }) => birge * u < SHARP * Math.abs(value));
  for (const { name, of } of held) {
    const limits = limitsOf(name, data, fit);
    found.set(
      name,
      sharp || !described
        ? { ends: normalEnds(of.value, birge * of.u, limits), profiled: false }
        : rangeOf(name, of, fit, birge, limits),
    );
  }
  return found;
}

/** value ± 1.96 u; null for an end beyond what the quantity can be. */
function normalEnds(value: number, u: number, [lowest, highest]: readonly [number, number]): Interval {
  const [low, high] = [value - HALF * u, value + HALF * u];
  return [low > lowest ? low : null, high < highest ? high : null];
}

function gradientOf(names: readonly Name[], name: Ranged, p: Float64Array): number[] {
  if (name === "D") return meanDiffusionOf(names, p).gradient;
  return names.map((each) => (each === name ? 1 : 0));
}

function rangeOf(
  name: Ranged,
  held: HeldFit,
  fit: CandidateFit,
  birge: number,
  [lowest, highest]: readonly [number, number],
): Range {
  const u = birge * held.u;
  const level = LEVEL * birge ** 2;
  const half = HALF * u;
  const [low, high] = [held.value - half, held.value + half];
  const normal = (x: number): boolean => {
    const rise = held.riseAlong(x);
    return rise !== null && Math.abs(rise / level - 1) < NORMAL;
  };
  const lifetime = name === "tau" || name === "trap_lifetime";
  // where a parameter is held at its end the line does not see what the others gain by its coming back
  const straight = fit.held.length === 0 && !(lifetime && (low <= 0 || high >= highest));
  if (straight && normal(low) && normal(high)) {
    return { ends: normalEnds(held.value, u, [lowest, highest]), profiled: false };
  }
  const { value, rise } = held;
  const scale = lifetime ? "rate" : "value";
  const ends = profileInterval({ value, u, lowest, highest, scale, rise }, level);
  const near = (end: number | null, x: number): boolean => end !== null && Math.abs(end - x) < SAME * half;
  return { ends, profiled: !(near(ends[0], low) && near(ends[1], high)) };
}

/** What the quantity can be at all; D may come out negative and a rate may not. */
function limitsOf(name: Ranged, data: StackData, fit: CandidateFit): [number, number] {
  const tau = fit.parameters[fit.names.indexOf("tau")]!;
  const delays = data.frames.map(({ delay }) => delay);
  const length = Math.max(...delays) - Math.min(...delays) + data.gate;
  switch (name) {
    case "D":
      return [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
    case "repulsion":
      return [0, ENDLESS];
    case "k_n0":
    case "capture":
      return [0, ENDLESS / Math.min(tau, length)];
    case "tau":
      return [0, ENDLESS * (length + tau)];
    case "trap_lifetime":
      return [0, Math.min(endlessLifetime(data), ENDLESS * ENDLESS * (length + tau))];
  }
}
