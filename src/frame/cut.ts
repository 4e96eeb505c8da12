import type { Detector } from "../stack/acquisition.ts";
import type { Stack } from "../stack/stack.ts";
import type { NoiseLaw, Patch, Rectangle } from "./patch.ts";

/** The detector's noise in photons: excess·mean + (read noise / gain)². */
export function noiseLaw(detector: Detector): NoiseLaw {
  return { excess: detector.excessNoise, floor: (detector.readNoise / detector.gain) ** 2 };
}

/** Reads frames as detected photons: (counts − dark or offset) / gain. One buffer, overwritten by the next read. */
export class PhotonReader {
  readonly photons: Float64Array;
  private readonly stack: Stack;
  private readonly inverseGain: number;

  constructor(stack: Stack) {
    this.stack = stack;
    this.photons = new Float64Array(stack.width * stack.height);
    this.inverseGain = 1 / stack.acquisition.detector.gain;
  }

  read(index: number): Float64Array {
    const { stack, photons, inverseGain } = this;
    stack.read(index, photons);
    const { dark } = stack;
    const { offset } = stack.acquisition.detector;
    if (dark !== null) {
      for (let i = 0; i < photons.length; i++) photons[i] = (photons[i]! - dark[i]!) * inverseGain;
    } else if (offset !== 0 || inverseGain !== 1) {
      for (let i = 0; i < photons.length; i++) photons[i] = (photons[i]! - offset) * inverseGain;
    }
    return photons;
  }
}

/** Sums frames pixel by pixel. */
export function sumFrames(reader: PhotonReader, indices: readonly number[]): Float64Array {
  const sum = new Float64Array(reader.photons.length);
  for (const index of indices) {
    const photons = reader.read(index);
    for (let i = 0; i < sum.length; i++) sum[i]! += photons[i]!;
  }
  return sum;
}

/** Cuts a rectangle out of a picture of `width` columns and pools the rest. */
export function cutPatch(photons: Float64Array, width: number, rectangle: Rectangle): Patch {
  const { x0, y0 } = rectangle;
  const data = new Float32Array(rectangle.width * rectangle.height);
  const right = x0 + rectangle.width;
  const bottom = y0 + rectangle.height;
  let outerSum = 0;
  let at = 0;
  for (let y = 0, row = 0; row < photons.length; y++, row += width) {
    if (y < y0 || y >= bottom) {
      for (let i = row; i < row + width; i++) outerSum += photons[i]!;
      continue;
    }
    for (let i = row; i < row + x0; i++) outerSum += photons[i]!;
    for (let i = row + x0; i < row + right; i++) data[at++] = photons[i]!;
    for (let i = row + right; i < row + width; i++) outerSum += photons[i]!;
  }
  return { rectangle, data, outerCount: photons.length - data.length, outerSum, excluded: [] };
}

/** A rectangle around a centre, clipped to the picture; pixels. */
export function rectangleAround(
  centre: readonly [x: number, y: number],
  reach: readonly [x: number, y: number],
  width: number,
  height: number,
): Rectangle {
  const x0 = Math.max(0, Math.floor(centre[0] - reach[0]));
  const y0 = Math.max(0, Math.floor(centre[1] - reach[1]));
  const x1 = Math.min(width, Math.ceil(centre[0] + reach[0]) + 1);
  const y1 = Math.min(height, Math.ceil(centre[1] + reach[1]) + 1);
  return { x0, y0, width: Math.max(1, x1 - x0), height: Math.max(1, y1 - y0) };
}
