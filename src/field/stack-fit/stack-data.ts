import type { NoiseLaw, Patch } from "../../frame/patch.ts";

/** One frame of a recording for the whole-stack fit. */
export interface StackFrame {
  /** Index in the recording. */
  readonly frame: number;
  /** Gate opening, ns. */
  readonly delay: number;
  /** The part around the spot in photons, the rest pooled. */
  readonly patch: Patch;
  /** How far the centre has drifted from the common centre, µm. */
  readonly shift: readonly [x: number, y: number];
  /** Background beside the common one, photons per pixel; 0 where one background serves all frames. */
  readonly background: number;
  /** Measured variance per axis, µm²: places the rings of the goodness-of-fit test. */
  readonly variance: number;
}

/** A recording for the whole-stack fit; lengths in µm, times in ns, light in photons. */
export interface StackData {
  readonly kind: "map" | "trace";
  readonly pixel: number;
  readonly noise: NoiseLaw;
  readonly frames: readonly StackFrame[];
  readonly gate: number;
  readonly responseSigma: number;
  readonly period: number | null;
  readonly slit: number | null;
  /** Variance of the point-spread function per axis, µm². */
  readonly blurVariance: number;
}

/** A patch cut down to a smaller rectangle, what is left out pooled. */
export function trimPatch(patch: Patch, rectangle: Patch["rectangle"]): Patch {
  const { x0, y0, width } = patch.rectangle;
  const left = Math.max(rectangle.x0, x0);
  const top = Math.max(rectangle.y0, y0);
  const right = Math.min(rectangle.x0 + rectangle.width, x0 + width);
  const bottom = Math.min(rectangle.y0 + rectangle.height, y0 + patch.rectangle.height);
  const inner = { x0: left, y0: top, width: right - left, height: bottom - top };
  if (inner.width <= 0 || inner.height <= 0) return patch;
  const data = new Float32Array(inner.width * inner.height);
  const excluded: number[] = [];
  const out = new Set(patch.excluded);
  let outerCount = patch.outerCount;
  let outerSum = patch.outerSum;
  for (let i = 0; i < patch.data.length; i++) {
    const x = x0 + (i % width);
    const y = y0 + Math.floor(i / width);
    const value = patch.data[i]!;
    if (x >= left && x < right && y >= top && y < bottom) {
      const at = (y - top) * inner.width + x - left;
      data[at] = value;
      if (out.has(i)) excluded.push(at);
    } else if (!out.has(i)) {
      outerCount++;
      outerSum += value;
    }
  }
  return { rectangle: inner, data, outerCount, outerSum, excluded };
}
