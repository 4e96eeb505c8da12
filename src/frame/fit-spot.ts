import { invertSymmetric } from "../numerics/linear-algebra.ts";
import type { Evaluation, Parameters } from "./kernel.ts";
import { createEvaluation, evaluateMap, evaluateTrace } from "./kernel.ts";
import type { NoiseLaw, Patch } from "./patch.ts";
import { LAYOUT } from "./pixel-spot.ts";

export interface PatchFit {
  readonly parameters: Parameters;
  /** Inverse Fisher matrix, row-major; pixels and photons. */
  readonly covariance: Float64Array;
  readonly reducedChi2: number;
  readonly converged: boolean;
  readonly iterations: number;
}

const MOST_ITERATIONS = 40;
/** Stop after a step shorter than this many standard deviations. */
const SMALLEST_STEP = 1e-5;
/** Share of a step that is taken at least, before it is cut to what is within reach. */
const SMALLEST_SHARE = 1 / 16;
/** A spot narrower than this, in pixels², is a single pixel's noise, not a spot. */
const SMALLEST_VARIANCE = 0.02;

/**
 * Maximum-likelihood spot of one frame by Fisher scoring: p ← p + I(p)⁻¹·s(p), with the pixels' weights taken anew
 * from the model in every step (R. A. Fisher's scoring; McCullagh and Nelder 1989, section 2.5). For photon counting
 * this is the Poisson maximum likelihood; for a camera the quasi-likelihood of its variance law. The covariance is the
 * inverse information at the optimum.
 *
 * A step is cut so that the centre moves at most one standard deviation of the spot and no principal variance shrinks
 * below a third or grows beyond threefold. Where the data's curvature λ differs from the expected one, full steps
 * overshoot (in faint frames back and forth for ever, λ ≥ 2): what is left of the step before, r = 1 − share·λ, tells λ,
 * and the next share is 1/λ (Barzilai and Borwein, IMA J. Numer. Anal. 8 (1988) 141), never above 1.
 *
 * @param start parameters in pixels and photons, with Σ positive definite
 * @param smallestStep the fit ends after a step shorter than this many standard deviations, √(δᵀIδ); the next one would
 * be shorter by about the frame's relative noise
 */
export function fitPatch(
  kind: "map" | "trace",
  patch: Patch,
  start: Parameters,
  noise: NoiseLaw,
  smallestStep = SMALLEST_STEP,
): PatchFit {
  const enough = smallestStep ** 2;
  const layout = LAYOUT[kind];
  const n = layout.count;
  const evaluate = kind === "map" ? evaluateMap : evaluateTrace;
  const evaluation = createEvaluation(n);
  const p = start.slice();
  const step = new Float64Array(n);
  let share = 1;
  let previous = Number.POSITIVE_INFINITY;
  let covariance = new Float64Array(n * n);
  const fail = (iterations: number): PatchFit => ({
    parameters: p,
    covariance,
    reducedChi2: evaluation.pearson / Math.max(evaluation.pixels - n, 1),
    converged: false,
    iterations,
  });

  for (let iteration = 1; iteration <= MOST_ITERATIONS; iteration++) {
    keepInBounds(kind, p, noise);
    evaluate(patch, p, noise, evaluation);
    covariance = evaluation.information.slice();
    if (!invertSymmetric(covariance, n)) return fail(iteration);
    const left = product(step, evaluation.score) / previous;
    const length2 = newtonStep(evaluation, covariance, n, step);
    if (!Number.isFinite(length2)) return fail(iteration);
    const pinned = pinBackground(kind, evaluation, p, step, noise);
    share = left < 1 ? Math.min(Math.max(share / (1 - left), SMALLEST_SHARE), 1) : 1;
    share *= longestStep(kind, p, step);
    for (let i = 0; i < n; i++) p[i]! += share * step[i]!;
    if (length2 < enough || pinned < enough) {
      return {
        parameters: p,
        covariance,
        reducedChi2: evaluation.pearson / Math.max(evaluation.pixels - n, 1),
        converged: plausible(kind, patch, p),
        iterations: iteration,
      };
    }
    previous = length2;
  }
  return fail(MOST_ITERATIONS);
}

function product(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

/** step = I⁻¹s; returns its squared length in standard deviations, sᵀI⁻¹s. */
export function newtonStep(
  evaluation: Evaluation,
  covariance: Float64Array,
  n: number,
  step: Float64Array,
): number {
  let length2 = 0;
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += covariance[i * n + j]! * evaluation.score[j]!;
    step[i] = sum;
    length2 += sum * evaluation.score[i]!;
  }
  return length2;
}

const SMALLEST_BACKGROUND = 1e-9;

/** A spot has light; and where photons are counted without read noise, a mean of photons is never negative. */
function keepInBounds(kind: "map" | "trace", p: Parameters, noise: NoiseLaw): void {
  const { photons, background } = LAYOUT[kind];
  if (p[photons]! < 1e-3) p[photons] = 1e-3;
  if (noise.floor === 0 && p[background]! < SMALLEST_BACKGROUND) p[background] = SMALLEST_BACKGROUND;
}

/**
 * Where the background lies on its lower bound and wants to go lower, the likelihood has its maximum on the bound:
 * the step of the other parameters is then that of the information without the background.
 *
 * @returns the squared length of the step that is left, in standard deviations; infinite where nothing is pinned
 */
function pinBackground(
  kind: "map" | "trace",
  evaluation: Evaluation,
  p: Parameters,
  step: Float64Array,
  noise: NoiseLaw,
): number {
  const { background, count } = LAYOUT[kind];
  if (noise.floor > 0 || p[background]! > SMALLEST_BACKGROUND || evaluation.score[background]! >= 0)
    return Number.POSITIVE_INFINITY;
  const m = count - 1;
  const reduced = new Float64Array(m * m);
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < m; j++) reduced[i * m + j] = evaluation.information[i * count + j]!;
  }
  if (!invertSymmetric(reduced, m)) return Number.POSITIVE_INFINITY;
  const length2 = newtonStep(evaluation, reduced, m, step);
  step[background] = 0;
  return length2;
}

/** The largest share of a step that keeps the centre and the widths within reach. */
function longestStep(kind: "map" | "trace", p: Parameters, step: Float64Array): number {
  const [vx, vxy, vy] = variances(kind, p);
  const [sx, sxy, sy] = variances(kind, step);
  const sigma = Math.sqrt(Math.max(vx, vy));
  let share = 1;
  for (const i of LAYOUT[kind].position)
    share = Math.min(share, sigma / Math.max(Math.abs(step[i]!), 1e-300));
  while (share > 1e-6) {
    const grown: [number, number, number] = [vx + share * sx, vxy + share * sxy, vy + share * sy];
    if (smallest(grown) > smallest([vx, vxy, vy]) / 3 && largest(grown) < 3 * largest([vx, vxy, vy])) break;
    share /= 2;
  }
  return share;
}

function variances(kind: "map" | "trace", p: Float64Array): [number, number, number] {
  const at = LAYOUT[kind].variance;
  return kind === "map" ? [p[at[0]]!, p[4]!, p[5]!] : [p[at[0]]!, 0, p[at[0]]!];
}

function largest([xx, xy, yy]: readonly [number, number, number]): number {
  return (xx + yy) / 2 + Math.hypot((xx - yy) / 2, xy);
}

function smallest([xx, xy, yy]: readonly [number, number, number]): number {
  return (xx + yy) / 2 - Math.hypot((xx - yy) / 2, xy);
}

/** A spot that is wider than the patch, narrower than a pixel's noise or outside the patch is no spot. */
function plausible(kind: "map" | "trace", patch: Patch, p: Parameters): boolean {
  const { x0, y0, width, height } = patch.rectangle;
  const sigma = variances(kind, p);
  const reach = Math.max(width, height);
  const inside =
    p[1]! >= x0 && p[1]! < x0 + width && (kind === "trace" || (p[2]! >= y0 && p[2]! < y0 + height));
  return inside && smallest(sigma) > SMALLEST_VARIANCE && largest(sigma) < reach * reach;
}
