import type { Parameters } from "../frame/kernel.ts";
import type { Patch } from "../frame/patch.ts";
import { LAYOUT } from "../frame/pixel-spot.ts";
import { referenceAt } from "../frame/references.ts";
import { backgroundScatter } from "../frame/scatter.ts";
import { shapeScore } from "../frame/shape.ts";
import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { runsTest } from "../numerics/runs-test.ts";
import type { LawFit } from "../transport/laws.ts";
import { fitLine, meanDiffusion } from "../transport/line.ts";
import { perAxis, perAxisVariance } from "../transport/width.ts";
import type { Reading } from "./reading.ts";
import { responseEnd } from "./response-end.ts";

/** An estimate over its standard uncertainty, with both. */
export interface Sign {
  readonly value: number;
  readonly u: number;
}

/** What speaks for and against the plain picture of one diffusing, decaying Gaussian spot. */
export interface Evidence {
  /** q of the spot's shape over all bright frames of the window: < 0 flat top, > 0 core on a foot (frame/shape.ts). */
  readonly shape: Sign;
  /** D of the first and of the second half of the window's information, µm²/ns. */
  readonly early: Sign;
  readonly late: Sign;
  /** Probability of the preferred law's χ². */
  readonly lawP: number;
  /** Of the line's χ² over all components. */
  readonly lineP: number;
  readonly runsP: number;
  /** Light before the pulse over the light right after it; null without frames before the pulse. */
  readonly glow: Sign | null;
  /** Scatter of the background's pixels over the detector's stated noise: Pearson's χ² over its degrees of freedom. */
  readonly scatter: Sign;
  /** Displacement of the centre over the window, in standard deviations of the spot. */
  readonly drift: Sign;
  /** Distance of the nearest border of the picture from the centre of the widest used spot, standard deviations. */
  readonly clearance: number;
  /** Largest relative departure of the background between eight sectors around the spot, with the test's probability. */
  readonly background: { readonly p: number; readonly swing: number };
}

export function gatherEvidence(reading: Reading): Evidence {
  const { laws, preferredLaw, line, widths } = reading;
  const law = preferredLaw === "line" ? null : laws[preferredLaw];
  return {
    shape: shapeOf(reading),
    ...halves(reading),
    lawP: law?.pValue ?? chiSquareUpperTail(line.chi2, line.degreesOfFreedom),
    lineP: chiSquareUpperTail(line.chi2, line.degreesOfFreedom),
    runsP: runsTest(standardised(reading, law)),
    glow: glowOf(reading),
    scatter: scatterOf(reading),
    drift: driftOf(reading, widths[0]!.time, widths.at(-1)!.time),
    clearance: clearanceOf(reading),
    background: reading.frames.surroundings,
  };
}

/** Residuals of the variance per axis against the preferred law, in standard deviations. */
function standardised({ widths, line }: Reading, law: LawFit | null): number[] {
  const { value } = law ?? lineValue(line);
  return widths.map((width) => (perAxis(width) - value(width.time)) / Math.sqrt(perAxisVariance(width)));
}

function lineValue(line: Reading["line"]): { value(t: number): number } {
  const mean = (c: readonly number[]): number => (c.length === 3 ? (c[0]! + c[2]!) / 2 : c[0]!);
  return { value: (t) => mean(line.intercept) + 2 * mean(line.diffusion) * t };
}

/** Frames with at least this much light over its standard deviation say something about shape. */
const BRIGHT = 8;
/** A long stack is asked in this many groups of neighbouring frames, added up: hardly any width is mixed in one. */
const GROUPS = 32;

function shapeOf(reading: Reading): Sign {
  return shapeAmong(reading, brightFrames(reading));
}

/** The first of the bright frames, this part of them: before annihilation and traps have done much. */
const FIRST = 0.1;

/** q of the spot's shape in the first frames. */
export function firstShape(reading: Reading): Sign {
  const bright = brightFrames(reading);
  return shapeAmong(reading, bright.slice(0, Math.ceil(FIRST * bright.length)));
}

function brightFrames({ widths, light }: Reading): number[] {
  return widths.map((width) => width.frame).filter((i) => light.value[i]! >= BRIGHT * light.sigma[i]!);
}

function shapeAmong(reading: Reading, bright: readonly number[]): Sign {
  const { frames } = reading;
  const size = Math.ceil(bright.length / GROUPS);
  let score = 0;
  let information = 0;
  let mixed = 0;
  for (let k = 0; k < bright.length; k += size) {
    const group = bright.slice(k, k + size);
    const { patch, spot } = addUp(reading, group);
    const noise = { excess: frames.noise.excess, floor: group.length * frames.noise.floor };
    const one = shapeScore(frames.kind, patch, spot, noise);
    score += one.score;
    information += one.information;
    mixed += one.information * mixing(reading, group);
  }
  if (information === 0) return { value: 0, u: Number.MAX_VALUE };
  return { value: (score - mixed) / information, u: 1 / Math.sqrt(information) };
}

/**
 * q that widths mixed in one picture bring by themselves: the spot spreads while the gate is open and from frame to frame
 * of a group. A mixture of Gaussians is peaked by var(σ²)/⟨σ²⟩² on a map, 3/√24 of that on a trace (fourth moment of a
 * mixture, derived); a gate of width w adds (2D·w)²/12 to the variance of σ².
 */
function mixing({ stack, frames, line, models, light }: Reading, group: readonly number[]): number {
  const spread = 2 * meanDiffusion(line).value * stack.acquisition.time.gate;
  const variances = group.map((i) => perAxis({ variance: models.variance(i) }));
  const weights = group.map((i) => Math.max(light.value[i]!, 0));
  const total = weights.reduce((sum, w) => sum + w, 0);
  const mean = variances.reduce((sum, v, k) => sum + v * weights[k]!, 0) / total;
  const between = variances.reduce((sum, v, k) => sum + (v - mean) ** 2 * weights[k]!, 0) / total;
  const relative = (between + spread ** 2 / 12) / mean ** 2;
  return frames.kind === "map" ? relative : (3 / Math.sqrt(24)) * relative;
}

/** Neighbouring frames as one: light and background add, centre and width are the means weighted by light. */
function addUp(
  { frames, own, models }: Reading,
  group: readonly number[],
): { patch: Patch; spot: Parameters } {
  const spotOf = (i: number): Parameters => own[i]?.parameters ?? referenceAt(frames, models, i);
  const patches = group.map((i) => frames.patches[i]!);
  if (group.length === 1) return { patch: patches[0]!, spot: spotOf(group[0]!) };
  const data = patches[0]!.data.slice();
  for (const patch of patches.slice(1)) for (let i = 0; i < data.length; i++) data[i]! += patch.data[i]!;
  const { photons, background } = LAYOUT[frames.kind];
  const spots = group.map(spotOf);
  const total = spots.reduce((sum, spot) => sum + spot[photons]!, 0);
  const spot = spots[0]!.map((_, a) => {
    const adds = a === photons || a === background;
    return spots.reduce((sum, each) => sum + each[a]! * (adds ? 1 : each[photons]! / total), 0);
  });
  const excluded = [...new Set(patches.flatMap((patch) => patch.excluded))];
  return { patch: { ...patches[0]!, data, excluded }, spot };
}

/** D before and after the middle of the slope's information. */
export function halves(reading: Reading): { early: Sign; late: Sign } {
  const { widths } = reading;
  const weights = widths.map((w) => 1 / perAxisVariance(w));
  const total = weights.reduce((a, b) => a + b, 0);
  let sum = 0;
  let split = 0;
  while (split < widths.length && sum < total / 2) sum += weights[split++]!;
  split = Math.min(Math.max(split, 3), widths.length - 3);
  const slope = (part: Reading["widths"]): Sign => {
    const fit = part.length >= 3 ? fitLine(part) : null;
    if (fit === null) return { value: 0, u: Number.MAX_VALUE };
    const { value, variance } = meanDiffusion(fit);
    return { value, u: Math.sqrt(variance) };
  };
  return { early: slope(widths.slice(0, split)), late: slope(widths.slice(split)) };
}

function glowOf({ light, flags, widths, stack }: Reading): Sign | null {
  const { acquisition } = stack;
  // light that a slow response smears to before the pulse is no older pulse's
  const reach = responseEnd(acquisition.response);
  let weights = 0;
  let sum = 0;
  for (const [i, list] of flags.entries()) {
    if (!list.includes("before-pulse") || !Number.isFinite(light.value[i]!)) continue;
    if (acquisition.time.delays[i]! + acquisition.time.gate > -reach + 1e-9) continue;
    const w = 1 / light.sigma[i]! ** 2;
    weights += w;
    sum += w * light.value[i]!;
  }
  if (weights === 0) return null;
  const first = light.value[widths[0]!.frame]!;
  return { value: sum / weights / first, u: 1 / Math.sqrt(weights) / first };
}

/** Frames asked for the scatter of their background; more would say the same. */
const ASKED = 16;

function scatterOf({ widths, models, frames }: Reading): Sign {
  let chi2 = 0;
  let pixels = 0;
  let variance = 0;
  const step = Math.max(1, Math.floor(widths.length / ASKED));
  for (let k = 0; k < widths.length; k += step) {
    const { frame } = widths[k]!;
    const one = backgroundScatter(
      frames.kind,
      frames.patches[frame]!,
      referenceAt(frames, models, frame),
      frames.noise,
    );
    chi2 += one.chi2;
    pixels += one.pixels;
    variance += one.variance;
  }
  return pixels === 0 ? { value: 1, u: 1 } : { value: chi2 / pixels, u: Math.sqrt(variance) / pixels };
}

function driftOf({ drift, models, widths }: Reading, from: number, to: number): Sign {
  const sigma = Math.sqrt(Math.max(models.variance(widths[0]!.frame)[0]!, 1e-12));
  const way = to - from;
  const speed = Math.hypot(...drift.speed);
  return { value: (speed * way) / sigma, u: (Math.max(...drift.u) * way) / sigma };
}

function clearanceOf({ stack, frames, models, widths }: Reading): number {
  const last = widths.at(-1)!.frame;
  const variance = models.variance(last);
  const [x, y] = models.centre(last);
  const { pixel, kind } = frames;
  const sx = Math.sqrt(Math.max(variance[0]!, 1e-12));
  const gap = (position: number, count: number): number =>
    Math.min(position + pixel / 2, (count - 0.5) * pixel - position);
  const across = gap(x, stack.width) / sx;
  if (kind === "trace") return across;
  return Math.min(across, gap(y, stack.height) / Math.sqrt(Math.max(variance[2]!, 1e-12)));
}
