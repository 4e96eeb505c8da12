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
    addTo(sum, reader.read(index));
  }
  return sum;
}

// Loops over whole frames are small functions of their own: those become machine code after a few frames.
function addTo(sum: Float64Array, photons: Float64Array): void {
  for (let i = 0; i < sum.length; i++) sum[i]! += photons[i]!;
}

/** Four sums side by side: one addition need not wait for the other. */
function sumOf(photons: Float64Array, from: number, to: number): number {
  let [a, b, c, d] = [0, 0, 0, 0];
  let i = from;
  for (; i + 3 < to; i += 4) {
    a += photons[i]!;
    b += photons[i + 1]!;
    c += photons[i + 2]!;
    d += photons[i + 3]!;
  }
  for (; i < to; i++) a += photons[i]!;
  return a + b + (c + d);
}

function copy(photons: Float64Array, from: number, to: number, into: Float32Array, at: number): void {
  for (let i = from; i < to; i++) into[at + i - from] = photons[i]!;
}

/** Cuts a rectangle out of a picture of `width` columns and pools the rest. */
export function cutPatch(photons: Float64Array, width: number, rectangle: Rectangle): Patch {
  const { x0, y0 } = rectangle;
  const data = new Float32Array(rectangle.width * rectangle.height);
  const right = x0 + rectangle.width;
  const bottom = y0 + rectangle.height;
  let outerSum = sumOf(photons, 0, y0 * width) + sumOf(photons, bottom * width, photons.length);
  for (let y = y0; y < bottom; y++) {
    const row = y * width;
    outerSum += sumOf(photons, row, row + x0) + sumOf(photons, row + right, row + width);
    copy(photons, row + x0, row + right, data, (y - y0) * rectangle.width);
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
