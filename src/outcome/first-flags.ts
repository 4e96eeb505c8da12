import type { FrameSet } from "../frame/prepare.ts";
import type { FrameFlag } from "../frame/spot.ts";
import type { Stack } from "../stack/stack.ts";
import type { AnalysisOptions } from "./analysis.ts";
import { responseEnd } from "./response-end.ts";

/** What speaks against a frame before any width is known: its delay, its light, the window asked for. */
export function firstFlags(
  delay: number,
  i: number,
  stack: Stack,
  frames: FrameSet,
  options: AnalysisOptions,
): FrameFlag[] {
  const { gate } = stack.acquisition.time;
  const flags: FrameFlag[] = [];
  if (delay < 0) flags.push("before-pulse");
  if (frames.empty[i]) flags.push("empty");
  if (frames.saturated[i]) flags.push("saturated");
  const from = options.from ?? responseEnd(stack.acquisition.response);
  const to = options.to ?? Number.POSITIVE_INFINITY;
  const slack = 1e-9 * (Math.abs(delay) + gate);
  if (delay >= 0 && (delay < from - slack || delay > to + slack)) flags.push("outside-window");
  return flags;
}
