import { solveSymmetric } from "../../numerics/linear-algebra.ts";
import { endlessLifetime, holding, isEndless } from "./endless.ts";
import type { StackOptimum } from "./fit-stack.ts";
import { keepFoot } from "./keep-foot.ts";
import type { Name } from "./parameters.ts";
import { type StackScore, scoreStack, tryDeviance } from "./score-stack.ts";
import type { StackData } from "./stack-data.ts";

/** A whole-stack fit with a linear combination gᵀp of its parameters held. */
export interface HeldFit {
  /** gᵀp of the fit, and its standard uncertainty. */
  readonly value: number;
  readonly u: number;
  /** −2 ln L over the fit's own along the line on which a normal likelihood rises by ((x − value)/u)²; null: no model. */
  riseAlong(x: number): number | null;
  /** The same with all that is free refitted: never more than along the line, but for rounding. */
  rise(x: number): number | null;
}

/** Parameters that cannot go through zero. */
const POSITIVE: readonly Name[] = ["amplitude", "s", "s_xx", "s_yy"];
const LIFETIMES: readonly Name[] = ["tau", "trap_lifetime"];
const LEAST_BACKGROUND = 1e-7;
/** Rates may go a little below zero, as in `fitStack`; in these units. */
const RATES: Readonly<Record<string, "1/τ" | "1">> = { k_n0: "1/τ", capture: "1/τ", repulsion: "1" };
const LEAST_RATE = -0.3;
/** What a refit may leave of the fall of −2 ln L that its next step promises; that step's promise is taken off. */
const LEFT = 0.2;
const MOST_STEPS = 10;
const DAMPINGS = [0, 1e-2, 1e-1, 1, 10, 100, 1e3] as const;

/**
 * Holds gᵀp and refits the rest by Fisher scoring within gᵀδ = 0: (I + μ·ggᵀ)δ = s − ν·g, ν so that the step keeps the
 * held value (Lagrange's multiplier; μ changes nothing within gᵀδ = 0, and gives I a rank where it has none along g).
 *
 * @param gradient g, one number a parameter of the fit
 */
export function heldFit(data: StackData, fit: StackOptimum, gradient: readonly number[]): HeldFit {
  const { names, covariance, parameters } = fit;
  const n = names.length;
  const along = gradient.map((_, i) => dot(gradient, covariance.subarray(i * n, (i + 1) * n)));
  const variance = dot(gradient, along);
  const value = dot(gradient, parameters);
  const only = gradient.filter((g) => g !== 0).length === 1 ? gradient.findIndex((g) => g !== 0) : -1;
  let warm = { at: value, p: parameters };
  const moved = (from: typeof warm, x: number): Float64Array => {
    // a lifetime held alone moves by its rate, and takes the others along by that
    const way = only >= 0 && LIFETIMES.includes(names[only]!) ? from.at * (1 - from.at / x) : x - from.at;
    const p = step(
      names,
      from.p,
      along.map((each) => (each * way) / variance),
      endlessLifetime(data),
    );
    // a parameter held alone goes where it is asked to, below zero or far above
    if (only >= 0) p[only] = x / gradient[only]!;
    return p;
  };
  return {
    value,
    u: Math.sqrt(variance),
    riseAlong(x) {
      const cost = tryDeviance(data, names, moved({ at: value, p: parameters }, x));
      return cost === null ? null : cost - fit.deviance;
    },
    rise(x) {
      const nearer = Math.abs(x - warm.at) < Math.abs(x - value) ? warm : { at: value, p: parameters };
      const found = refit(data, names, moved(nearer, x), gradient);
      if (found === null) return null;
      warm = { at: x, p: found.p };
      return found.deviance - fit.deviance;
    },
  };
}

function refit(
  data: StackData,
  names: readonly Name[],
  start: Float64Array,
  gradient: readonly number[],
): { p: Float64Array; deviance: number } | null {
  const cost = tryDeviance(data, names, start);
  if (cost === null) return null;
  let best = { p: start, deviance: cost };
  for (let count = 0; count < MOST_STEPS; count++) {
    const { score, information } = scoreWithin(data, names, best.p, gradient);
    const full = heldStep(information, score, gradient, 0);
    const promised = full === null ? Number.POSITIVE_INFINITY : dot(full, score);
    if (promised < LEFT) return { p: best.p, deviance: best.deviance - promised };
    const next = descend(data, names, best, (damping) => heldStep(information, score, gradient, damping));
    if (next === null) break;
    best = next;
  }
  return best;
}

/** A lifetime in traps that has no end stays there, as in `fitStack`, unless it is what is held. */
function scoreWithin(
  data: StackData,
  names: readonly Name[],
  p: Float64Array,
  gradient: readonly number[],
): StackScore {
  const found = scoreStack(data, names, p);
  const i = names.indexOf("trap_lifetime");
  return i >= 0 && gradient[i] === 0 && isEndless(data, names, p, found) ? holding(found, i) : found;
}

/** The least damped step that improves the fit; null where none does. */
function descend(
  data: StackData,
  names: readonly Name[],
  best: { p: Float64Array; deviance: number },
  stepOf: (damping: number) => Float64Array | null,
): { p: Float64Array; deviance: number } | null {
  for (const damping of DAMPINGS) {
    const delta = stepOf(damping);
    if (delta === null) continue;
    const p = step(names, best.p, delta, endlessLifetime(data));
    const cost = tryDeviance(data, names, p);
    if (cost !== null && cost < best.deviance) return { p, deviance: cost };
  }
  return null;
}

function heldStep(
  information: Float64Array,
  score: Float64Array,
  gradient: readonly number[],
  damping: number,
): Float64Array | null {
  const n = gradient.length;
  const matrix = information.slice();
  // as large as what is known of the held combination already, so that digits are kept
  const size = gradient.reduce((sum, g, i) => sum + Math.abs(g) * information[i * n + i]!, 0);
  const mu = Number.isFinite(size) && size > 0 ? size : 1;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) matrix[i * n + j]! += mu * gradient[i]! * gradient[j]!;
    matrix[i * n + i]! *= 1 + damping;
  }
  const delta = score.slice();
  const held = Float64Array.from(gradient);
  if (!solveSymmetric(matrix.slice(), n, delta) || !solveSymmetric(matrix, n, held)) return null;
  const multiplier = dot(gradient, delta) / dot(gradient, held);
  return delta.map((each, i) => each - multiplier * held[i]!);
}

function dot(a: ArrayLike<number>, b: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

/**
 * p + δ on paths of that slope: what must stay positive moves by its logarithm, lifetimes by their rates, in which the
 * likelihood is nearer to normal.
 */
function step(
  names: readonly Name[],
  p: Float64Array,
  delta: ArrayLike<number>,
  endless: number,
): Float64Array {
  const tau = p[names.indexOf("tau")]!;
  const to = p.map((value, i) => {
    const name = names[i]!;
    const unit = RATES[name];
    if (unit !== undefined) {
      const floor = unit === "1/τ" ? LEAST_RATE / tau : LEAST_RATE;
      return Math.max(value + delta[i]!, Math.min(value, floor));
    }
    if (name === "background") return Math.max(value + delta[i]!, LEAST_BACKGROUND);
    const share = delta[i]! / value;
    if (LIFETIMES.includes(name)) {
      const to = value / (1 - Math.min(Math.max(share, -3), 0.75));
      return name === "trap_lifetime" ? Math.min(to, Math.max(value, endless)) : to;
    }
    if (POSITIVE.includes(name)) return value * Math.exp(Math.min(Math.max(share, -1), 1));
    return value + delta[i]!;
  });
  keepFoot(names, p, to);
  return to;
}
