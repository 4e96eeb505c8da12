import type { Decays } from "../decay/fit.ts";
import type { PatchFit } from "../frame/fit-spot.ts";
import type { FrameSet } from "../frame/prepare.ts";
import type { SmoothModels } from "../frame/references.ts";
import type { ScoredSpot } from "../frame/score-spot.ts";
import type { FrameFlag } from "../frame/spot.ts";
import type { Stack } from "../stack/stack.ts";
import type { LawFit, TransportLaw } from "../transport/laws.ts";
import type { LineFit } from "../transport/line.ts";
import type { Width } from "../transport/width.ts";

/** Everything read from a recording, before it is turned into quantities and a verdict; µm, ns, photons. */
export interface Reading {
  readonly stack: Stack;
  readonly frames: FrameSet;
  /** Each frame's own maximum-likelihood spot; null where the frame is too dim or the fit failed. */
  readonly own: readonly (PatchFit | null)[];
  /** Each frame read against the smooth models. */
  readonly scored: readonly (ScoredSpot | null)[];
  readonly models: SmoothModels;
  readonly flags: readonly (readonly FrameFlag[])[];
  /** Middle of each gate, ns. */
  readonly times: Float64Array;
  /** The frames in the window. */
  readonly widths: readonly Width[];
  readonly line: LineFit;
  readonly laws: Record<TransportLaw, LawFit | null>;
  readonly preferredLaw: TransportLaw;
  readonly light: LightSeries;
  readonly decays: Decays | null;
  readonly drift: Drift;
  readonly rounds: number;
}

/** Light with the width on the law. */
export interface LightSeries {
  /** Frames in the decay fit. */
  readonly frames: readonly number[];
  /** Photons, one a frame of the stack, NaN where there is none. */
  readonly value: Float64Array;
  readonly sigma: Float64Array;
  /** How the light answers to an error of Σ: ∂N/∂Σ components, photons per µm². */
  readonly perVariance: readonly (readonly number[])[];
}

/** How the spot's centre moves. */
export interface Drift {
  readonly kind: "constant" | "line" | "own";
  /** µm/ns along x and y (x alone on a trace). */
  readonly speed: readonly number[];
  readonly u: readonly number[];
}
