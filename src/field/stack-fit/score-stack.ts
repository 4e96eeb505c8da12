import type { NoiseLaw } from "../../frame/patch.ts";
import { pixelVariance } from "../../frame/patch.ts";
import type { SimilarLight } from "../similar/problem.ts";
import { type Resolution, resolutionOf, similarLight } from "../similar/similar-light.ts";
import { type Name, problemOf, type Values, valuesOf } from "./parameters.ts";
import { addRings, isRound, quasiDeviance, type RoundLight, ringDeviance } from "./ring-score.ts";
import type { StackData, StackFrame } from "./stack-data.ts";

/** Quasi-score and Fisher information of all pixels of all frames. */
export interface StackScore {
  readonly score: Float64Array;
  /** Row-major. */
  readonly information: Float64Array;
}

/** Light per pixel for one photon of amplitude, and where the centre stands. */
interface Rendering {
  readonly light: SimilarLight;
  readonly x: number;
  readonly y: number;
}

/** Light beyond the patches is asked for by no fit, and is not worked out. */
function render(data: StackData, v: Values, resolution: Resolution): Rendering {
  const problem = { ...problemOf(data, v), reach: farthest(data, v) };
  return { light: similarLight(problem, resolution), x: v.x!, y: v.y ?? 0 };
}

/** Distance from the centre to the farthest corner of any frame, µm. */
function farthest({ frames, pixel }: StackData, v: Values): number {
  const distances = frames.map(({ patch: { rectangle }, shift }) => {
    const far = (start: number, count: number, centre: number): number =>
      Math.max(Math.abs(start * pixel - centre), Math.abs((start + count) * pixel - centre));
    const { x0, y0, width, height } = rectangle;
    return Math.hypot(far(x0, width, v.x! + shift[0]), far(y0, height, (v.y ?? 0) + shift[1]));
  });
  return Math.max(...distances);
}

/** The mean of frame k's pixels without background, photons for amplitude 1, into `out`. */
function paint(data: StackData, { light, x, y }: Rendering, k: number, out: Float64Array): void {
  const { patch, shift } = data.frames[k]!;
  const { pixel, kind } = data;
  const { x0, y0, width, height } = patch.rectangle;
  const grid = { x0: x0 * pixel - x - shift[0], y0: y0 * pixel - y - shift[1], pixel, width, height };
  light.fill(k, grid, out);
  const area = kind === "map" ? pixel * pixel : pixel;
  for (let i = 0; i < width * height; i++) out[i]! *= area;
}

/** Step of the differences, as a share of a parameter's natural size. */
const DIFFERENCE = 1e-3;

/** How much of a change matters, by what the parameter is. */
export function naturalSize(name: Name, v: Values): number {
  const variance = v.s ?? Math.sqrt(Math.max(v.s_xx! * v.s_yy! - v.s_xy! ** 2, 1e-12));
  switch (name) {
    case "x":
    case "y":
      return Math.sqrt(variance);
    case "s":
    case "s_xx":
    case "s_xy":
    case "s_yy":
      return variance;
    case "D":
    case "D_xx":
    case "D_xy":
    case "D_yy":
      return variance / v.tau!;
    case "repulsion":
      return 1;
    case "foot_share":
      return 0.3;
    case "foot_ratio":
      return v.foot_ratio!;
    case "k_n0":
    case "capture":
      return 1 / v.tau!;
    case "tau":
      return v.tau!;
    case "trap_lifetime":
      return v.trap_lifetime!;
    case "amplitude":
      return v.amplitude!;
    case "background":
      return Math.max(Math.abs(v.background!), 1e-3);
  }
}

/**
 * Score Σ (d − m)/v·∂m/∂p and information Σ ∂m/∂p·∂m/∂q/v over all pixels of all frames, the pooled ones included;
 * v from the model. Derivatives by amplitude and background are exact, the others differences of the solver's light at
 * one resolution, on one side: right to 1e-3, which the score's root feels by 1e-3 of a standard deviation.
 */
export function scoreStack(data: StackData, names: readonly Name[], p: Float64Array): StackScore {
  const n = names.length;
  const v = valuesOf(names, p);
  const resolution = resolutionOf(problemOf(data, v));
  const base = render(data, v, resolution);
  const score = new Float64Array(n);
  const information = new Float64Array(n * n);
  if (isRound(data, base.light)) {
    addRings(data, names, v, base.light, roundSides(data, names, v, resolution), score, information);
  } else addPixels(data, names, v, base, resolution, score, information);
  for (const frame of data.frames) {
    addPool(frame, names.indexOf("background"), v, data.noise, score, information);
  }
  for (let a = 0; a < n; a++) for (let b = 0; b < a; b++) information[b * n + a] = information[a * n + b]!;
  return { score, information };
}

function roundSides(data: StackData, names: readonly Name[], v: Values, resolution: Resolution) {
  return names.map((name) => {
    if (["amplitude", "background", "x", "y"].includes(name)) return null;
    const h = DIFFERENCE * naturalSize(name, v);
    const moved = render(data, { ...v, [name]: v[name]! + h }, resolution).light as RoundLight;
    return { moved, scale: v.amplitude! / h };
  });
}

function addPixels(
  data: StackData,
  names: readonly Name[],
  v: Values,
  base: Rendering,
  resolution: Resolution,
  score: Float64Array,
  information: Float64Array,
): void {
  const sides = names.map((name) => {
    if (name === "amplitude" || name === "background") return null;
    const h = DIFFERENCE * naturalSize(name, v);
    const to = { [name]: v[name]! + h };
    const moved =
      name === "x" || name === "y" ? { ...base, ...to } : render(data, { ...v, ...to }, resolution);
    return { moved, scale: v.amplitude! / h };
  });
  const largest = Math.max(...data.frames.map(({ patch }) => patch.data.length));
  const image = new Float64Array(largest);
  const columns = names.map(() => new Float64Array(largest));
  for (let k = 0; k < data.frames.length; k++) {
    const frame = data.frames[k]!;
    const count = frame.patch.data.length;
    paint(data, base, k, image);
    for (const [j, side] of sides.entries()) {
      const column = columns[j]!;
      if (names[j] === "amplitude") column.set(image.subarray(0, count));
      else if (side === null) column.fill(1, 0, count);
      else {
        paint(data, side.moved, k, column);
        for (let i = 0; i < count; i++) column[i] = (column[i]! - image[i]!) * side.scale;
      }
    }
    addFrame(frame, image, columns, v, data.noise, score, information);
  }
}

function addFrame(
  { patch, background }: StackFrame,
  image: Float64Array,
  columns: readonly Float64Array[],
  v: Values,
  noise: NoiseLaw,
  score: Float64Array,
  information: Float64Array,
): void {
  const n = columns.length;
  const level = v.background! + background;
  const excluded = new Set(patch.excluded);
  const row = new Float64Array(n);
  for (let i = 0; i < patch.data.length; i++) {
    if (excluded.size > 0 && excluded.has(i)) continue;
    const mean = v.amplitude! * image[i]! + level;
    const w = 1 / pixelVariance(noise, mean);
    const residual = (patch.data[i]! - mean) * w;
    for (let a = 0; a < n; a++) row[a] = columns[a]![i]!;
    for (let a = 0; a < n; a++) {
      const slope = row[a]!;
      if (slope === 0) continue;
      score[a]! += residual * slope;
      const weighted = w * slope;
      for (let b = 0; b <= a; b++) information[a * n + b]! += weighted * row[b]!;
    }
  }
}

function addPool(
  { patch, background }: StackFrame,
  at: number,
  v: Values,
  noise: NoiseLaw,
  score: Float64Array,
  information: Float64Array,
): void {
  const level = v.background! + background;
  const w = 1 / pixelVariance(noise, level);
  score[at]! += (patch.outerSum - patch.outerCount * level) * w;
  information[at * score.length + at]! += patch.outerCount * w;
}

/** Called with every pixel that counts: data, mean, frame's place and pixel's index. */
export type Visit = (value: number, mean: number, k: number, index: number) => void;

/**
 * −2 × the log quasi-likelihood of a whole stack, up to a constant: minus twice the function whose slope `scoreStack`
 * gives, see `quasiDeviance`.
 *
 * @param visit also sees every pixel of the patches
 */
export function deviance(data: StackData, names: readonly Name[], p: Float64Array, visit?: Visit): number {
  const v = valuesOf(names, p);
  const base = render(data, v, resolutionOf(problemOf(data, v)));
  const pools = data.frames.reduce((sum, { patch, background }) => {
    return sum + quasiDeviance(data.noise, patch.outerCount, patch.outerSum, v.background! + background);
  }, 0);
  if (visit === undefined && isRound(data, base.light)) return pools + ringDeviance(data, v, base.light);
  return pools + pixelDeviance(data, v, base, visit);
}

function pixelDeviance(data: StackData, v: Values, base: Rendering, visit?: Visit): number {
  const image = new Float64Array(Math.max(...data.frames.map(({ patch }) => patch.data.length)));
  let sum = 0;
  for (const [k, { patch, background }] of data.frames.entries()) {
    paint(data, base, k, image);
    const level = v.background! + background;
    const excluded = new Set(patch.excluded);
    for (let i = 0; i < patch.data.length; i++) {
      if (excluded.size > 0 && excluded.has(i)) continue;
      const mean = v.amplitude! * image[i]! + level;
      sum += quasiDeviance(data.noise, 1, patch.data[i]!, mean);
      visit?.(patch.data[i]!, mean, k, i);
    }
  }
  return sum;
}

/** −2 ln L, or null where no light follows from the parameters. */
export function tryDeviance(data: StackData, names: readonly Name[], p: Float64Array): number | null {
  if (!p.every(Number.isFinite)) return null;
  try {
    const cost = deviance(data, names, p);
    return Number.isFinite(cost) ? cost : null;
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
}
