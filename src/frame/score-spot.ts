import { invertSymmetric } from "../numerics/linear-algebra.ts";
import { newtonStep } from "./fit-spot.ts";
import type { Evaluation, Parameters } from "./kernel.ts";
import { evaluateMap, evaluateTrace } from "./kernel.ts";
import type { NoiseLaw, Patch } from "./patch.ts";
import { LAYOUT } from "./pixel-spot.ts";

/** One frame read against a reference spot; pixels and photons. */
export interface ScoredSpot {
  /** p = p_ref + I⁻¹s, in the kernel's order. */
  readonly estimate: Parameters;
  /** I⁻¹ at the reference, row-major. */
  readonly covariance: Float64Array;
  /** Light with Σ held at the reference: estimate, variance, and how it answers to an error of the reference's Σ. */
  readonly light: {
    readonly value: number;
    readonly variance: number;
    readonly perVariance: readonly number[];
  };
  /** Pearson's χ² of the reference and the pixels it counts. */
  readonly pearson: number;
  readonly pixels: number;
}

/**
 * One step of Fisher scoring from a reference: p = p_ref + I(p_ref)⁻¹·s(p_ref), covariance I(p_ref)⁻¹.
 *
 * The references come from smooth models over all frames (the law of spread, the decay), so weights and error bars owe
 * nothing to the frame's own fluctuation: a frame that happens to look narrow does not claim a small error. The
 * expectation of the score vanishes at the true spot, so the estimate is unbiased at any light level where the
 * reference is right; it is linear in light and background, so a wrong reference for those costs no bias at all. At
 * convergence of the laws this is maximum likelihood of all frames together with light, centre and background free in
 * each (scoring, McCullagh and Nelder 1989, section 2.5); the covariance is that of its Cramér–Rao bound.
 *
 * @returns null where the frame holds no information on some parameter
 */
export function scoreSpot(
  kind: "map" | "trace",
  patch: Patch,
  reference: Parameters,
  noise: NoiseLaw,
  evaluation: Evaluation,
): ScoredSpot | null {
  const n = LAYOUT[kind].count;
  (kind === "map" ? evaluateMap : evaluateTrace)(patch, reference, noise, evaluation);
  const covariance = evaluation.information.slice();
  if (!invertSymmetric(covariance, n)) return null;
  const step = new Float64Array(n);
  newtonStep(evaluation, covariance, n, step);
  const light = lightGivenWidth(kind, evaluation, reference);
  if (light === null) return null;
  const estimate = reference.map((value, i) => value + step[i]!);
  return { estimate, covariance, light, pearson: evaluation.pearson, pixels: evaluation.pixels };
}

/** Light, centre and background free, Σ held: N = N_ref + (J⁻¹s)_N with J the information without Σ's rows. */
function lightGivenWidth(
  kind: "map" | "trace",
  evaluation: Evaluation,
  reference: Parameters,
): ScoredSpot["light"] | null {
  const { count, variance } = LAYOUT[kind];
  const { information, score } = evaluation;
  const widths: readonly number[] = variance;
  const free = Array.from({ length: count }, (_, i) => i).filter((i) => !widths.includes(i));
  const m = free.length;
  const inner = new Float64Array(m * m);
  for (let i = 0; i < m; i++)
    for (let j = 0; j < m; j++) inner[i * m + j] = information[free[i]! * count + free[j]!]!;
  if (!invertSymmetric(inner, m)) return null;
  let step = 0;
  const perVariance = widths.map(() => 0);
  for (let j = 0; j < m; j++) {
    const weight = inner[j]!;
    step += weight * score[free[j]!]!;
    for (let k = 0; k < widths.length; k++)
      perVariance[k]! -= weight * information[free[j]! * count + widths[k]!]!;
  }
  return { value: reference[0]! + step, variance: inner[0]!, perVariance };
}
