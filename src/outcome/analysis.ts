import type { Candidate } from "../field/stack-fit/parameters.ts";
import type { Spot } from "../frame/spot.ts";
import type { Stack } from "../stack/stack.ts";
import type { Result } from "./result.ts";

/** A fitted curve with its standard uncertainty, to draw. */
export interface CurvePoint {
  readonly delay: number;
  readonly value: number;
  readonly u: number;
}

/** What the report needs beside the result: the curves, and each frame's fitted spot. */
export interface Analysis {
  readonly result: Result;
  readonly stack: Stack;
  /** One a frame; null where no spot could be fitted. */
  readonly spots: readonly (Spot | null)[];
  /** Variance per axis (µm²) of the preferred law of spread over delay (ns), across the window. */
  readonly spreadCurve: readonly CurvePoint[];
  /** Light (photons a frame) of the preferred decay; empty without a decay. */
  readonly lightCurve: readonly CurvePoint[];
  /** Residuals of the decay fit in standard deviations, one a frame; null where not used. */
  readonly lightResiduals: readonly (number | null)[];
  /**
   * Mean light of a frame over the whole picture by the preferred model of the whole stack, photons per pixel,
   * row-major; false where the model leaves the frame out. Null where no model was fitted to the whole stack.
   */
  readonly wholeLight: ((frame: number, into: Float64Array) => boolean) | null;
}

/** What the user may set of the analysis. */
export interface AnalysisOptions {
  /** Window of delays for the law of spread, ns. */
  readonly from?: number;
  readonly to?: number;
  /** The whole-stack fit: "auto" where the widths' answer is in doubt (default), "always" or "never". */
  readonly field?: "auto" | "always" | "never";
  /** Seed of the Monte Carlo intervals. */
  readonly seed?: number;
  /** Told after each frame. */
  readonly onProgress?: (done: number, total: number) => void;
  /** Told before each model that is fitted to the whole stack. */
  readonly onCandidate?: (name: Candidate["name"]) => void;
}
