import type { Response } from "../stack/acquisition.ts";

/** When and how each frame looked at the light. */
export interface Timing {
  readonly delays: ArrayLike<number>;
  readonly gate: number;
  readonly response: Response | null;
  readonly period: number | null;
  readonly transmission: ArrayLike<number> | null;
}

/** Writes O_i and ∂O_i/∂r of e^(−r·u), transmission 1. */
export type Column = (rate: number, value: Float64Array, slope: Float64Array) => void;
