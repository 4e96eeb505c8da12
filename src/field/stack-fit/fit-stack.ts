import { invertSymmetric, solveSymmetric } from "../../numerics/linear-algebra.ts";
import { endlessLifetime, holding, isEndless } from "./endless.ts";
import { keepFoot } from "./keep-foot.ts";
import type { Name, Values } from "./parameters.ts";
import { valuesOf } from "./parameters.ts";
import { deviance, naturalSize, type StackScore, scoreStack, tryDeviance } from "./score-stack.ts";
import type { StackData } from "./stack-data.ts";

export interface StackOptimum {
  readonly names: readonly Name[];
  readonly parameters: Float64Array;
  /** Inverse Fisher matrix, row-major. */
  readonly covariance: Float64Array;
  /** −2 ln L up to a constant that all candidates share. */
  readonly deviance: number;
  readonly converged: boolean;
  readonly reason: string;
  readonly iterations: number;
  /** Parameters at the end of what they can be, where the likelihood still rises: the data set them no bound there. */
  readonly held: readonly Name[];
}

/** A fit that is going anywhere gets there in six to ten. */
const MOST_STEPS = 12;
/** The fit stands when the step that is left is shorter than this, in standard deviations. */
const STANDSTILL = 0.01;
const MOST_DAMPING = 1e6;
/** From farther away, in standard deviations, what is left says little of where the fit will end. */
const FORESEEABLE = 20;
/** A fit that falls by less than a tenth of what its steps promise, this often in a row, is stuck in a bent valley. */
const MOST_SLOW_STEPS = 3;

/**
 * Maximum likelihood of a whole stack by damped Fisher scoring: (I + λ·diag I)·δ = s, λ down by ten where −2 ln L falls
 * and up by ten where it does not (Levenberg's damping with Marquardt's scaling, SIAM J. Appl. Math. 11 (1963) 431, on
 * the scoring equations of McCullagh and Nelder 1989, section 2.5).
 *
 * @param start every parameter in `names`
 * @param toBeat give up as soon as −2 ln L is not going to fall below this: at a maximum with parameters that nothing
 *   speaks for the way is long and flat
 */
export function fitStack(
  data: StackData,
  names: readonly Name[],
  start: Values,
  toBeat = Number.POSITIVE_INFINITY,
): StackOptimum {
  const n = names.length;
  let p: Float64Array = Float64Array.from(names, (name) => start[name]!);
  let cost = deviance(data, names, p);
  let damping = 1e-4;
  let iterations = 0;
  let reason = "the step limit was reached";
  let converged = false;
  let slow = 0;
  let { score, information, held } = scoreWithin(data, names, p);
  while (iterations < MOST_STEPS) {
    iterations++;
    const left = stepLength(information, score, n);
    if (left !== null && left < STANDSTILL) {
      converged = true;
      reason = "a maximum was reached";
      break;
    }
    // the step that is left promises a fall by its square
    if (left !== null && left < FORESEEABLE && cost - 1.5 * left ** 2 > toBeat) {
      reason = "a simpler model does as well";
      break;
    }
    const next = descend(data, names, p, cost, score, information, damping);
    if (next === null) {
      // nothing nearby is better: the rounding of −2 ln L hides the rest of a short step
      converged = left !== null && left < 0.2;
      reason = converged ? "a maximum was reached" : "no step improves the fit";
      break;
    }
    slow = left !== null && cost - next.cost > 0.1 * left ** 2 ? 0 : slow + 1;
    ({ p, cost, damping } = next);
    if (slow === MOST_SLOW_STEPS && cost > toBeat) {
      reason = "the fit stays behind a simpler model";
      break;
    }
    ({ score, information, held } = scoreWithin(data, names, p));
  }
  const covariance = information.slice();
  const determined = invertSymmetric(covariance, n);
  for (const name of held) {
    const i = names.indexOf(name);
    covariance[i * n + i] = p[i]! ** 2;
  }
  if (!determined) reason = "the data do not determine every parameter";
  return {
    names,
    parameters: p,
    covariance,
    deviance: cost,
    converged: converged && determined,
    reason,
    iterations,
    held,
  };
}

function scoreWithin(
  data: StackData,
  names: readonly Name[],
  p: Float64Array,
): StackScore & { held: readonly Name[] } {
  const found = scoreStack(data, names, p);
  if (!isEndless(data, names, p, found)) return { ...found, held: [] };
  return { ...holding(found, names.indexOf("trap_lifetime")), held: ["trap_lifetime"] };
}

/** √(sᵀI⁻¹s): the undamped step in standard deviations; null where the information is singular. */
function stepLength(information: Float64Array, score: Float64Array, n: number): number | null {
  const step = score.slice();
  if (!solveSymmetric(information.slice(), n, step)) return null;
  return Math.sqrt(
    Math.max(
      step.reduce((sum, each, i) => sum + each * score[i]!, 0),
      0,
    ),
  );
}

function descend(
  data: StackData,
  names: readonly Name[],
  p: Float64Array,
  cost: number,
  score: Float64Array,
  information: Float64Array,
  damping: number,
): { p: Float64Array; cost: number; damping: number } | null {
  const n = names.length;
  const v = valuesOf(names, p);
  for (let lambda = damping; lambda < MOST_DAMPING; lambda *= 10) {
    const damped = information.slice();
    for (let i = 0; i < n; i++) {
      damped[i * n + i]! *= 1 + lambda;
      // a parameter that the data say nothing of yet stays within some natural sizes of where it is
      damped[i * n + i]! += lambda / naturalSize(names[i]!, v) ** 2;
    }
    const step = score.slice();
    if (!solveSymmetric(damped, n, step)) continue;
    const trial = p.map((value, i) => value + step[i]!);
    keepPossible(data, names, p, trial);
    const trialCost = tryDeviance(data, names, trial);
    if (trialCost !== null && trialCost < cost)
      return { p: trial, cost: trialCost, damping: Math.max(lambda / 10, 1e-7) };
  }
  return null;
}

/**
 * Positive quantities shrink to a third of themselves at most in one step; k·n₀ may go a little below zero. Capture may
 * not: without caught excitons nothing tells it from 1/τ, and the fit would wander.
 */
function keepPossible(data: StackData, names: readonly Name[], from: Float64Array, to: Float64Array): void {
  const tau = valuesOf(names, from).tau!;
  for (const [i, name] of names.entries()) {
    const positive = ["amplitude", "s", "s_xx", "s_yy", "tau", "trap_lifetime"].includes(name);
    if (positive) to[i] = Math.min(Math.max(to[i]!, from[i]! / 3), 5 * from[i]!);
    if (name === "trap_lifetime") to[i] = Math.min(to[i]!, endlessLifetime(data));
    if (name === "background") to[i] = Math.max(to[i]!, 1e-7);
    // D(1 + β) stays above zero everywhere
    if (name === "repulsion") to[i] = Math.max(to[i]!, -0.3);
    if (name === "k_n0") to[i] = Math.max(to[i]!, -0.3 / tau);
    if (name === "capture") to[i] = Math.max(to[i]!, from[i]! / 5);
  }
  keepFoot(names, from, to);
}
