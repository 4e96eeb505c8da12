import type { FrameSet } from "../frame/prepare.ts";
import { prepareFrames } from "../frame/prepare.ts";
import { InputFault } from "../stack/fault.ts";
import type { Stack } from "../stack/stack.ts";
import type { AnalysisOptions } from "./analysis.ts";
import type { Reading } from "./reading.ts";
import { Rounds } from "./rounds.ts";

/** The spot must keep this many standard deviations of clearance inside its patch. */
const CLEARANCE = 4;

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
