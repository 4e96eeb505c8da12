import type { Covariance } from "../../frame/spot.ts";
import { type Foot, wideningOf } from "../similar/foot.ts";
import type { SimilarProblem } from "../similar/problem.ts";
import type { StackData } from "./stack-data.ts";

/** What a candidate leaves free beside light, centre, start, D, τ and background. */
export interface Candidate {
  readonly name:
    | "diffusion"
    | "annihilation"
    | "capture"
    | "annihilation_and_capture"
    | "repulsion"
    | "annihilation_and_repulsion";
  readonly annihilation: boolean;
  readonly capture: boolean;
  readonly repulsion: boolean;
}

export const CANDIDATES: readonly Candidate[] = [
  { name: "diffusion", annihilation: false, capture: false, repulsion: false },
  { name: "annihilation", annihilation: true, capture: false, repulsion: false },
  { name: "capture", annihilation: false, capture: true, repulsion: false },
  { name: "annihilation_and_capture", annihilation: true, capture: true, repulsion: false },
  { name: "repulsion", annihilation: false, capture: false, repulsion: true },
  { name: "annihilation_and_repulsion", annihilation: true, capture: false, repulsion: true },
];

/** Which components of start and motion are free: one for a round spot, three for an elliptical one. */
export interface Symmetry {
  readonly start: "round" | "free";
  readonly diffusion: "isotropic" | "tensor";
  /** A start of two Gaussians of one centre, for a spot that is visibly none from the first frames on. */
  readonly footed?: boolean;
}

export type Name =
  | "amplitude"
  | "x"
  | "y"
  | "s"
  | "s_xx"
  | "s_xy"
  | "s_yy"
  | "D"
  | "D_xx"
  | "D_xy"
  | "D_yy"
  | "tau"
  | "background"
  | "foot_share"
  | "foot_ratio"
  | "repulsion"
  | "k_n0"
  | "capture"
  | "trap_lifetime";

/** Values by name; µm, ns, photons. */
export type Values = Partial<Record<Name, number>>;

export const UNITS: Readonly<Record<Name, string>> = {
  amplitude: "photons",
  x: "µm",
  y: "µm",
  s: "µm²",
  s_xx: "µm²",
  s_xy: "µm²",
  s_yy: "µm²",
  D: "µm²/ns",
  D_xx: "µm²/ns",
  D_xy: "µm²/ns",
  D_yy: "µm²/ns",
  tau: "ns",
  background: "photons/pixel",
  foot_share: "1",
  foot_ratio: "1",
  repulsion: "1",
  k_n0: "1/ns",
  capture: "1/ns",
  trap_lifetime: "ns",
};

/** The free parameters of a candidate, in a fixed order. */
export function namesOf(kind: "map" | "trace", candidate: Candidate, symmetry: Symmetry): Name[] {
  const names: Name[] = ["amplitude", "x"];
  if (kind === "map") names.push("y");
  if (kind === "map" && symmetry.start === "free") names.push("s_xx", "s_xy", "s_yy");
  else names.push("s");
  if (kind === "map" && symmetry.diffusion === "tensor") names.push("D_xx", "D_xy", "D_yy");
  else names.push("D");
  names.push("tau", "background");
  if (symmetry.footed === true) names.push("foot_share", "foot_ratio");
  if (candidate.repulsion) names.push("repulsion");
  if (candidate.annihilation) names.push("k_n0");
  if (candidate.capture) names.push("capture", "trap_lifetime");
  return names;
}

/** Caught excitons shine like free ones: light alone cannot tell capture from ε, see `fitCandidates`. */
const TRAP_LIGHT = 1;

export function problemOf(data: StackData, v: Values): SimilarProblem {
  const start: Covariance = v.s === undefined ? [v.s_xx!, v.s_xy!, v.s_yy!] : [v.s, 0, v.s];
  const diffusion: Covariance = v.D === undefined ? [v.D_xx!, v.D_xy!, v.D_yy!] : [v.D, 0, v.D];
  const foot = v.foot_share === undefined ? undefined : { share: v.foot_share, ratio: v.foot_ratio! };
  return {
    kind: data.kind,
    ...(foot === undefined ? { start } : { start: narrowed(start, foot), foot }),
    diffusion,
    lifetime: v.tau!,
    repulsion: v.repulsion ?? 0,
    annihilation: v.k_n0 ?? 0,
    capture: v.capture ?? 0,
    trapLifetime: v.trap_lifetime ?? v.tau!,
    trapLight: TRAP_LIGHT,
    blurVariance: data.blurVariance,
    pixel: data.pixel,
    delays: data.frames.map((frame) => frame.delay),
    gate: data.gate,
    responseSigma: data.responseSigma,
    period: data.period,
    slit: data.slit,
  };
}

/** Σ₀ stands for the whole start. */
function narrowed([xx, xy, yy]: Covariance, foot: Foot): Covariance {
  const by = 1 / wideningOf(foot);
  return [by * xx, by * xy, by * yy];
}

export function valuesOf(names: readonly Name[], p: ArrayLike<number>): Values {
  return Object.fromEntries(names.map((name, i) => [name, p[i]!]));
}

/** Half the trace of D on a map, D_xx on a trace: value and gradient by the parameters. */
export function meanDiffusionOf(
  names: readonly Name[],
  p: ArrayLike<number>,
): { value: number; gradient: number[] } {
  const weight = (name: Name): number => (name === "D" ? 1 : name === "D_xx" || name === "D_yy" ? 0.5 : 0);
  const gradient = names.map(weight);
  return { value: gradient.reduce((sum, g, i) => sum + g * p[i]!, 0), gradient };
}
