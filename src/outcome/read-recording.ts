import type { Decays } from "../decay/fit.ts";
import type { PatchFit } from "../frame/fit-spot.ts";
import type { FrameSet } from "../frame/prepare.ts";
import { prepareFrames } from "../frame/prepare.ts";
import type { SmoothModels } from "../frame/references.ts";
import type { ScoredSpot } from "../frame/score-spot.ts";
import type { FrameFlag } from "../frame/spot.ts";
import { InputFault } from "../stack/fault.ts";
import type { Stack } from "../stack/stack.ts";
import type { LawFit, TransportLaw } from "../transport/laws.ts";
import type { LineFit } from "../transport/line.ts";
import type { Width } from "../transport/width.ts";
import type { AnalysisOptions } from "./analysis.ts";
import { Rounds } from "./rounds.ts";

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

/** The spot must keep this many standard deviations of clearance inside its patch. */
const CLEARANCE = 4.5;

/**
 * Reads a recording: spots, widths, light, laws. Where the fitted spot outgrows its patch, the patch is cut wider and
 * everything read again.
 *
 * @throws InputFault where no spot is found or too few frames can be used
 */
export function readRecording(stack: Stack, options: AnalysisOptions = {}): Reading {
  let reachFactor = 1;
  for (;;) {
    const frames = prepareFrames(stack, reachFactor);
    const reading = new Rounds(stack, frames, options).read();
    const lacking = patchLack(reading);
    if (lacking <= 1 || reachFactor > 4 || isWhole(stack, frames)) return reading;
    reachFactor *= 1.1 * lacking;
  }
}

/** How many times wider the patch should be for the widest used spot. */
function patchLack({ frames, models, widths }: Reading): number {
  const last = widths.at(-1);
  if (last === undefined) throw new InputFault("no frame is left to fit");
  const { rectangle, pixel, kind } = frames;
  const variance = models.variance(last.frame);
  const needX = (2 * CLEARANCE * Math.sqrt(Math.max(variance[0]!, 0))) / pixel;
  const needY = kind === "map" ? (2 * CLEARANCE * Math.sqrt(Math.max(variance[2]!, 0))) / pixel : 0;
  return Math.max(needX / rectangle.width, needY / rectangle.height);
}

function isWhole(stack: Stack, { rectangle }: FrameSet): boolean {
  return rectangle.width === stack.width && rectangle.height === stack.height;
}
