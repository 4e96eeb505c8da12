import { similarLight } from "../field/similar/similar-light.ts";
import type { StackOptimum } from "../field/stack-fit/fit-stack.ts";
import { problemOf, valuesOf } from "../field/stack-fit/parameters.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";
import { tolerance } from "../frame/outliers.ts";

/**
 * The recording with those pixels back that were set aside as struck but are what a whole-stack model expects. At the
 * top of a sharp core on a wide glow they stand out of a Gaussian, the bright ones first: left out, they take light
 * from the core.
 *
 * @returns the same object where no pixel comes back
 */
export function sparePixels(
  data: StackData,
  { names, parameters }: Pick<StackOptimum, "names" | "parameters">,
): StackData {
  if (data.frames.every(({ patch }) => patch.excluded.length === 0)) return data;
  const v = valuesOf(names, parameters);
  const light = similarLight(problemOf(data, v));
  const { kind, pixel, noise } = data;
  const scale = v.amplitude! * (kind === "map" ? pixel * pixel : pixel);
  const seen = new Float64Array(1);
  let spared = 0;
  const frames = data.frames.map((frame, k) => {
    const { patch, shift, background } = frame;
    const { x0, y0, width } = patch.rectangle;
    const excluded = patch.excluded.filter((i) => {
      const x = (x0 + (i % width)) * pixel - v.x! - shift[0];
      const y = kind === "map" ? (y0 + Math.floor(i / width)) * pixel - v.y! - shift[1] : 0;
      light.fill(k, { x0: x, y0: y, pixel, width: 1, height: 1 }, seen);
      const mean = scale * seen[0]! + v.background! + background;
      return Math.abs(patch.data[i]! - mean) > tolerance(noise, mean);
    });
    spared += patch.excluded.length - excluded.length;
    return { ...frame, patch: { ...patch, excluded } };
  });
  return spared === 0 ? data : { ...data, frames };
}
