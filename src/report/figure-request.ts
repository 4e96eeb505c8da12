import type { Analysis } from "../outcome/analysis.ts";
import type { Stack } from "../stack/stack.ts";
import { chosenFrames } from "./figure-profiles.ts";

/** An analysis as plain data for a drawing thread: of the frames only those that a figure shows. */
export interface FigureRequest {
  readonly analysis: Omit<Analysis, "stack" | "wholeLight">;
  readonly stack: Omit<Stack, "read">;
  /** Stored counts by the frame's index. */
  readonly frames: ReadonlyMap<number, Float64Array>;
}

export function figureRequest({ stack, wholeLight: _, ...analysis }: Analysis): FigureRequest {
  const { kind, frames, height, width, dark, acquisition, source } = stack;
  const read = chosenFrames(analysis).map(({ row }): [number, Float64Array] => {
    const counts = new Float64Array(height * width);
    stack.read(row.index, counts);
    return [row.index, counts];
  });
  return {
    analysis,
    stack: { kind, frames, height, width, dark, acquisition, source },
    frames: new Map(read),
  };
}

/** The analysis again, on the other side. */
export function analysisOf({ analysis, stack, frames }: FigureRequest): Analysis {
  const read: Stack["read"] = (index, into) => {
    const counts = frames.get(index);
    if (counts === undefined) throw new RangeError(`frame ${index} was not sent to the drawing thread`);
    into.set(counts);
  };
  // no figure shows the whole-stack model's light
  return { ...analysis, stack: { ...stack, read }, wholeLight: null };
}
