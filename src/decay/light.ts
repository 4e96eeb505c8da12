import type { Response } from "../stack/acquisition.ts";

/** The light of a spot over delay: what the decay laws are fitted to. */
export interface LightData {
  /** Gate openings, ns; the pulse is at 0. */
  readonly delays: ArrayLike<number>;
  /** Gate width, ns; 0: instantaneous. */
  readonly gate: number;
  readonly response: Response | null;
  /** Time between pulses, ns. */
  readonly period: number | null;
  /** Detected photons in each frame; negative values are legitimate in dim frames. */
  readonly light: ArrayLike<number>;
  /** Standard deviations from a smooth model, not from the data: they are taken as fixed. */
  readonly sigma: ArrayLike<number>;
  /**
   * Share of the light that reaches the detector in each frame, by which every law is multiplied; null: all of it.
   * A slit of width w passes erf(w/(2√2·σ_y(t))). For emission order 2 the light of a spreading spot, ∫n² dA ∝
   * N²/√|Σ|, also falls as n thins out, on a map by √|Σ(0)|/√|Σ(t)| with Σ the density's: that belongs here too.
   */
  readonly transmission: ArrayLike<number> | null;
  /** Light ∝ density^order. */
  readonly emissionOrder: 1 | 2;
}

export type DecayLaw = "exponential" | "two_exponentials" | "stretched" | "annihilation";

/** A quantity derived from the fitted parameters, ns. */
export interface DerivedTime {
  readonly value: number;
  /** Standard uncertainty from the covariance of the fit. */
  readonly u: number;
  /** ∂value/∂parameter, in the order of the parameters. */
  readonly gradient: Float64Array;
}

/** One decay law fitted to the light. */
export interface DecayFit {
  readonly law: DecayLaw;
  /** The light after one pulse, in plain text. */
  readonly formula: string;
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly parameters: Float64Array;
  /** Row-major, (JᵀJ)⁻¹ with rows over sigma: no Birge factor. */
  readonly covariance: Float64Array;
  /** One array a parameter: ∂prediction_i/∂parameter at the optimum. */
  readonly jacobian: readonly Float64Array[];
  /** Photons in each frame, transmission included. */
  readonly prediction: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  /** Probability of a χ² at least as large if the law is true. */
  readonly pValue: number;
  readonly aicc: number;
  /** A minimum was reached, it is a sensible one of this law, and it can be told from a simpler law's. */
  readonly converged: boolean;
  readonly reason: string;
  /** The light at other delays with the same gate, response and period, transmission 1. */
  predict(delays: ArrayLike<number>): Float64Array;
  /** N(t)/N(0) of the excitons after one pulse, t ≥ 0 in ns: no gate, no response, no earlier pulses. */
  survival(t: number): number;
  /** The headline τ: of the exponential and of annihilation the parameter τ, otherwise ⟨τ⟩ = ∫ survival dt. */
  readonly lifetime: DerivedTime;
  /** ∫ survival dt. */
  readonly amplitudeAveraged: DerivedTime;
  /** ∫ t·survival dt / ∫ survival dt. */
  readonly intensityAveraged: DerivedTime;
}
