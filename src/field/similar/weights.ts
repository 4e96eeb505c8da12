import type { Exposure } from "../exposure.ts";
import type { Timeline } from "./timeline.ts";

/** How a frame's light is made up of the states of a timeline. */
export interface FrameWeights {
  /** For n, all pulses added. */
  readonly free: Float64Array;
  /** For m; null without traps. */
  readonly caught: Float64Array | null;
}

/**
 * A frame is a weighted sum over gate nodes and pulses, hence over the timeline's states. Caught excitons of pulses
 * older than the timeline only decay: a geometric series.
 */
export function frameWeights(
  timeline: Timeline,
  list: readonly Exposure[],
  frames: number,
  period: number | null,
): FrameWeights[] {
  const traps = timeline.rates.capture > 0;
  const weights: FrameWeights[] = Array.from({ length: frames }, () => ({
    free: new Float64Array(timeline.size),
    caught: traps ? new Float64Array(timeline.size) : null,
  }));
  for (const { frame, age, weight } of list) {
    const { free, caught } = weights[frame]!;
    for (let t = age; ; t += period!) {
      if (t > timeline.end && period !== null) {
        if (caught) timeline.addCaught(t, -weight / Math.expm1(-timeline.rates.trapRate * period), caught);
        break;
      }
      timeline.addFree(t, weight, free);
      if (caught) timeline.addCaught(t, weight, caught);
      if (period === null) break;
    }
  }
  return weights;
}

/** n + εm. */
export function lightWeights({ free, caught }: FrameWeights, trapLight: number): Float64Array {
  return caught === null ? free : free.map((w, i) => w + trapLight * caught[i]!);
}

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}
