import type { NoiseLaw } from "../../frame/patch.ts";
import { pixelVariance } from "../../frame/patch.ts";
import type { SimilarLight } from "../similar/problem.ts";
import type { Name, Values } from "./parameters.ts";
import { type RingFrame, ringSums, SUMS, slopeOverRadius } from "./ring-sums.ts";
import type { StackData } from "./stack-data.ts";

/** A light that is round. */
export type RoundLight = SimilarLight & Required<Pick<SimilarLight, "radial">>;

export function isRound(data: StackData, light: SimilarLight): light is RoundLight {
  return data.kind === "map" && light.radial !== undefined;
}

/** The light with a parameter moved, and what turns the difference into photons per unit of it. */
export interface Side {
  readonly moved: RoundLight;
  readonly scale: number;
}

/** Place among the sums of a derivative's factor (1, x or y) times another's. */
const PRODUCTS: readonly (readonly number[])[] = [
  [0, 1, 2],
  [1, 3, 4],
  [2, 4, 5],
];
/** And of the pixels' photons times 1, x or y. */
const PHOTONS = 6;

/**
 * Adds the pixels' part of score and information, see `scoreStack`, for a round light: derivatives by the centre are
 * −A·I′(r)·x/r, all others functions of r, so that sums over pixels become sums over circles, see `RingSums`.
 *
 * @param sides null for amplitude, centre and background, whose derivatives need none
 */
export function addRings(
  data: StackData,
  names: readonly Name[],
  v: Values,
  light: RoundLight,
  sides: readonly (Side | null)[],
  score: Float64Array,
  information: Float64Array,
): void {
  const rings = ringSums(data, v.x!, v.y!);
  const largest = Math.max(...rings.frames.map(({ count }) => count));
  const image = new Float64Array(largest);
  const columns = names.map(() => new Float64Array(largest));
  const factors = names.map((name) => (name === "x" ? 1 : name === "y" ? 2 : 0));
  for (const [k, frame] of rings.frames.entries()) {
    const { count } = frame;
    paintRings(data, light, k, rings.step, count, image);
    for (const [j, name] of names.entries()) {
      const column = columns[j]!;
      const side = sides[j]!;
      if (name === "amplitude") column.set(image.subarray(0, count));
      else if (name === "background") column.fill(1, 0, count);
      else if (side === null) {
        slopeOverRadius(image, count, rings.step, column);
        for (let i = 0; i < count; i++) column[i] = -v.amplitude! * column[i]!;
      } else {
        paintRings(data, side.moved, k, rings.step, count, column);
        for (let i = 0; i < count; i++) column[i] = (column[i]! - image[i]!) * side.scale;
      }
    }
    const level = v.background! + data.frames[k]!.background;
    addFrame(frame, image, columns, factors, v.amplitude!, level, data.noise, score, information);
  }
}

function addFrame(
  { count, sums }: RingFrame,
  image: Float64Array,
  columns: readonly Float64Array[],
  factors: readonly number[],
  amplitude: number,
  level: number,
  noise: NoiseLaw,
  score: Float64Array,
  information: Float64Array,
): void {
  const n = columns.length;
  const products = factors.map((a) => factors.map((b) => PRODUCTS[a]![b]!));
  for (let j = 0; j < count; j++) {
    const at = j * SUMS;
    const mean = amplitude * image[j]! + level;
    const w = 1 / pixelVariance(noise, mean);
    for (let a = 0; a < n; a++) {
      const slope = w * columns[a]![j]!;
      if (slope === 0) continue;
      const factor = factors[a]!;
      score[a]! += slope * (sums[at + PHOTONS + factor]! - mean * sums[at + factor]!);
      for (let b = 0; b <= a; b++) {
        information[a * n + b]! += slope * columns[b]![j]! * sums[at + products[a]![b]!]!;
      }
    }
  }
}

/**
 * −2∫(d − m)/V(m) dm summed over pixels of mean m, up to a constant, with V = f + F·m the variance (Wedderburn,
 * Biometrika 61 (1974) 439): 2(m/F − (d/F + f/F²)·ln V). Counted photons (F = 1, f = 0) have their own −2 ln L in it;
 * for all noise it is linear in the pixels' sum, and its slope asks nothing of the noise beyond mean and variance.
 */
export function quasiDeviance(noise: NoiseLaw, pixels: number, photons: number, mean: number): number {
  const { excess, floor } = noise;
  const evidence = (photons + (pixels * floor) / excess) / excess;
  return 2 * ((pixels * mean) / excess - evidence * Math.log(pixelVariance(noise, mean)));
}

/** The pixels' part of `deviance` for a round light. */
export function ringDeviance(data: StackData, v: Values, light: RoundLight): number {
  const rings = ringSums(data, v.x!, v.y!);
  const image = new Float64Array(Math.max(...rings.frames.map(({ count }) => count)));
  let sum = 0;
  for (const [k, { count, sums }] of rings.frames.entries()) {
    paintRings(data, light, k, rings.step, count, image);
    const level = v.background! + data.frames[k]!.background;
    for (let j = 0; j < count; j++) {
      const mean = v.amplitude! * image[j]! + level;
      sum += quasiDeviance(data.noise, sums[j * SUMS]!, sums[j * SUMS + PHOTONS]!, mean);
    }
  }
  return sum;
}

/** Mean photons per pixel without background at the nodes, for amplitude 1. */
function paintRings(
  { pixel }: StackData,
  light: RoundLight,
  k: number,
  step: number,
  count: number,
  out: Float64Array,
): void {
  light.radial(k, step, count, out);
  for (let j = 0; j < count; j++) out[j]! *= pixel * pixel;
}
