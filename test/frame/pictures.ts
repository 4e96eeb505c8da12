import type { Parameters } from "../../src/frame/kernel.ts";
import type { NoiseLaw, Patch, Rectangle } from "../../src/frame/patch.ts";
import type { Random } from "../../src/numerics/random.ts";

/**
 * The spot of the design written out once more, plainly and apart from the code under test: mean photons of the pixel at
 * (x, y) of a map (N, x, y, Σxx, Σxy, Σyy, B) or of a trace (N, x, Σxx, B); pixels and photons.
 */
export function meanOf(p: ArrayLike<number>, x: number, y: number): number {
  if (p.length === 4) {
    return (p[0]! / Math.sqrt(2 * Math.PI * p[2]!)) * Math.exp(-((x - p[1]!) ** 2) / (2 * p[2]!)) + p[3]!;
  }
  const [n, cx, cy, xx, xy, yy, b] = Array.from(p) as [
    number,
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  const determinant = xx * yy - xy ** 2;
  const distance2 = (yy * (x - cx) ** 2 - 2 * xy * (x - cx) * (y - cy) + xx * (y - cy) ** 2) / determinant;
  return (n / (2 * Math.PI * Math.sqrt(determinant))) * Math.exp(-distance2 / 2) + b;
}

export function pictureOf(p: ArrayLike<number>, width: number, height = 1): Float64Array {
  return Float64Array.from({ length: width * height }, (_, i) => meanOf(p, i % width, Math.floor(i / width)));
}

/** Photons with a camera's noise: variance excess·mean + floor. */
export function draw(mean: Float64Array, noise: NoiseLaw, random: Random): Float64Array {
  const spread = noise.excess - 1;
  return mean.map((light) => {
    const photons = random.poisson(light);
    const charge = spread > 0 && photons > 0 ? random.gamma(photons / spread, spread) : photons;
    return noise.floor > 0 ? charge + Math.sqrt(noise.floor) * random.normal() : charge;
  });
}

export function wholePatch(data: ArrayLike<number>, width: number, height = 1): Patch {
  const rectangle: Rectangle = { x0: 0, y0: 0, width, height };
  return { rectangle, data: Float32Array.from(data), outerCount: 0, outerSum: 0, excluded: [] };
}

export const COUNTING: NoiseLaw = { excess: 1, floor: 0 };
export const CAMERA: NoiseLaw = { excess: 2, floor: 9 };

export const kindOf = (p: Parameters): "map" | "trace" => (p.length === 4 ? "trace" : "map");
