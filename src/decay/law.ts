import type { DecayLaw } from "./light.ts";

/** A decay law bound to an instrument and an emission order: how its parameters become the light of each frame. */
export interface Law {
  readonly law: DecayLaw;
  readonly formula: string;
  readonly names: readonly string[];
  readonly units: readonly string[];
  /** Which parameters are positive by nature: they are fitted as logarithms. */
  readonly positive: readonly boolean[];
  /** What it means that parameter j ended at the lower or upper end of its range. */
  edge(j: number, end: "lower" | "upper"): string;
  /** Photons in each frame, and their derivatives by each parameter. */
  evaluate(p: ArrayLike<number>, value: Float64Array, jacobian: readonly Float64Array[]): void;
  /** N(t)/N(0) after one pulse. */
  survival(p: ArrayLike<number>, t: number): number;
  /** The parameter that is the headline lifetime, or null for the amplitude-averaged one. */
  readonly headline: number | null;
  /** ∫ survival dt */
  amplitudeAveraged(p: ArrayLike<number>): number;
  /** ∫ t·survival dt / ∫ survival dt */
  intensityAveraged(p: ArrayLike<number>): number;
}

/** What a lifetime at the end of its range means. */
export function lifetimeEdge(end: "lower" | "upper"): string {
  return end === "upper"
    ? "no end of the decay is seen: a lifetime grew beyond all that the record can tell"
    : "a lifetime became shorter than the frames can tell";
}
