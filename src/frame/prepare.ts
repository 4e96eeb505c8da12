import { InputFault } from "../stack/fault.ts";
import type { Stack } from "../stack/stack.ts";
import { cutPatch, noiseLaw, PhotonReader, rectangleAround, sumFrames } from "./cut.ts";
import { firstLook, NEAR } from "./first-look.ts";
import type { PatchFit } from "./fit-spot.ts";
import { fitPatch } from "./fit-spot.ts";
import type { Parameters } from "./kernel.ts";
import { excludeFrom, findGlaring, isOutlier, tolerance } from "./outliers.ts";
import type { NoiseLaw, Patch, Rectangle } from "./patch.ts";
import { LAYOUT } from "./pixel-spot.ts";
import type { Surroundings } from "./surroundings.ts";
import { surveyBackground } from "./surroundings.ts";

/** All frames of a stack, cut around the spot and ready to fit. */
export interface FrameSet {
  readonly kind: "map" | "trace";
  /** Side of a pixel, µm. */
  readonly pixel: number;
  readonly noise: NoiseLaw;
  readonly rectangle: Rectangle;
  readonly patches: readonly Patch[];
  /** The spot of all frames after the pulse together; photons per frame. Pixels and photons. */
  readonly typical: Parameters;
  /** Frames in which the spot reaches the detector's saturation. */
  readonly saturated: readonly boolean[];
  /** Frames in which nothing was recorded. */
  readonly empty: readonly boolean[];
  /** How even the background is around the spot. */
  readonly surroundings: Surroundings;
  /** Pixels set aside outside the patch; those inside are listed in each patch. */
  readonly outerOutliers: Int32Array;
}

/** How far the patch reaches from the spot, in standard deviations of its widest frame. */
const REACH = 4.5;

/**
 * Finds the spot in the sum of all frames after the pulse, cuts every frame around it and pools the rest.
 *
 * All fits start from this sum, not from the frame before: no frame's result depends on its neighbours' luck.
 *
 * @param reachFactor widens the patch; for a second try where the fitted spot outgrew it
 * @throws InputFault where the frames after the pulse hold no spot
 */
export function prepareFrames(stack: Stack, reachFactor = 1): FrameSet {
  const { kind, width, height } = stack;
  const { delays } = stack.acquisition.time;
  const noise = noiseLaw(stack.acquisition.detector);
  const reader = new PhotonReader(stack);
  const after = delays.flatMap((delay, index) => (delay >= 0 ? [index] : []));
  if (after.length < 3) {
    throw new InputFault(
      `${stack.source.file}: only ${after.length} of ${stack.frames} frames open at or after the pulse (delay 0); at least 3 are needed. Check time.first and time.step.`,
      { file: stack.source.file, where: "time.first" },
    );
  }
  const middle = after.length >> 1;
  const late = sumFrames(reader, after.slice(middle));
  const whole = sumFrames(reader, after.slice(0, middle));
  for (let i = 0; i < whole.length; i++) whole[i]! += late[i]!;
  const first = firstLook(kind, whole, width, height, sumNoise(noise, after.length));
  if (first === null) {
    throw new InputFault(
      `${stack.source.file}: no spot stands out of the background in the sum of the ${after.length} frames after the pulse. Check that the recording shows the spot and that time.first is right.`,
      { file: stack.source.file },
    );
  }
  const background = Math.max(first.parameters[LAYOUT[kind].background]!, 0);
  const glaring = findGlaring(whole, width, height, sumNoise(noise, after.length), background);
  const widest = widestSpot(
    stack,
    late,
    (after.length - middle) / after.length,
    first,
    sumNoise(noise, after.length - middle),
    glaring,
  );
  const rectangle = patchAround(kind, first.parameters, widest, REACH * reachFactor, width, height);

  const surroundings = surveyBackground(
    whole,
    width,
    height,
    [first.parameters[1]!, kind === "map" ? first.parameters[2]! : 0],
    [REACH * widest[0], REACH * widest[1]],
    sumNoise(noise, after.length),
  );

  const glaringInside = insideOf(rectangle, glaring, width);
  const patches: Patch[] = [];
  const saturated: boolean[] = [];
  const flat: boolean[] = [];
  const isSaturated = saturationOf(stack);
  const outerOutliers = new Int32Array(stack.frames);
  for (let index = 0; index < stack.frames; index++) {
    const photons = reader.read(index);
    const patch = cutPatch(photons, width, rectangle);
    excludeFrom(patch, glaringInside);
    outerOutliers[index] = removeOuterOutliers(photons, width, height, patch, noise);
    patches.push(patch);
    flat.push(isFlat(photons));
    saturated.push(isSaturated(patch));
  }
  const typical = first.parameters.slice();
  typical[0]! /= after.length;
  typical[LAYOUT[kind].background]! /= after.length;
  return {
    kind,
    pixel: stack.acquisition.space.pixel.value,
    noise,
    rectangle,
    patches,
    typical,
    saturated,
    empty: emptyFrames(flat, patches, noise),
    surroundings,
    outerOutliers,
  };
}

/** The noise of a sum of `count` frames: the means add, and so do the read noises' variances. */
function sumNoise(noise: NoiseLaw, count: number): NoiseLaw {
  return { excess: noise.excess, floor: noise.floor * count };
}

/**
 * Standard deviations (x, y) of the widest of the sum's spot and the later frames' spot, pixels.
 *
 * @param late sum of the later frames, `share` of all
 */
function widestSpot(
  stack: Stack,
  late: Float64Array,
  share: number,
  first: PatchFit,
  noise: NoiseLaw,
  glaring: readonly number[],
): [number, number] {
  const { kind, width, height } = stack;
  const start = first.parameters.slice();
  start[0]! *= 0.3;
  start[LAYOUT[kind].background]! *= share;
  const sigma = sigmas(kind, first.parameters);
  const rectangle = patchAround(kind, first.parameters, sigma, 2 * REACH, width, height);
  const patch = cutPatch(late, width, rectangle);
  excludeFrom(patch, insideOf(rectangle, glaring, width));
  const fit = fitPatch(kind, patch, start, noise, NEAR);
  if (!fit.converged || fit.parameters[0]! ** 2 < 100 * fit.covariance[0]!) return sigma;
  const lateSigma = sigmas(kind, fit.parameters);
  const shift = (axis: number): number =>
    kind === "trace" && axis === 2 ? 0 : Math.abs(fit.parameters[axis]! - first.parameters[axis]!);
  return [
    Math.max(sigma[0], lateSigma[0]) + (2 * shift(1)) / REACH,
    Math.max(sigma[1], lateSigma[1]) + (2 * shift(2)) / REACH,
  ];
}

function sigmas(kind: "map" | "trace", p: Parameters): [number, number] {
  return kind === "map" ? [Math.sqrt(p[3]!), Math.sqrt(p[5]!)] : [Math.sqrt(p[2]!), 0];
}

function patchAround(
  kind: "map" | "trace",
  p: Parameters,
  sigma: readonly [number, number],
  reach: number,
  width: number,
  height: number,
): Rectangle {
  const ry = kind === "map" ? reach * sigma[1] + 2 : 0;
  return rectangleAround([p[1]!, kind === "map" ? p[2]! : 0], [reach * sigma[0] + 2, ry], width, height);
}

/** Indices into a rectangle's pixels of those of the picture's that lie in it. */
function insideOf(
  { x0, y0, width, height }: Rectangle,
  indices: readonly number[],
  columns: number,
): number[] {
  return indices.flatMap((index) => {
    const [x, y] = [(index % columns) - x0, Math.floor(index / columns) - y0];
    return x >= 0 && x < width && y >= 0 && y < height ? [y * width + x] : [];
  });
}

/** Takes hot and struck pixels out of the pool; the pool's own mean says what a pixel should hold. */
function removeOuterOutliers(
  photons: Float64Array,
  width: number,
  height: number,
  patch: Patch,
  noise: NoiseLaw,
): number {
  if (patch.outerCount === 0) return 0;
  const { x0, y0 } = patch.rectangle;
  const mean = patch.outerSum / patch.outerCount;
  const limit = tolerance(noise, mean);
  let removed = 0;
  const inspect = (from: number, to: number): void => {
    for (let i = nextStray(photons, from, to, mean, limit); i < to; ) {
      if (isOutlier(photons, width, height, i, noise, mean)) {
        patch.outerCount--;
        patch.outerSum -= photons[i]!;
        removed++;
      }
      i = nextStray(photons, i + 1, to, mean, limit);
    }
  };
  const bottom = y0 + patch.rectangle.height;
  inspect(0, y0 * width);
  for (let y = y0; y < bottom; y++) {
    inspect(y * width, y * width + x0);
    inspect(y * width + x0 + patch.rectangle.width, (y + 1) * width);
  }
  inspect(bottom * width, height * width);
  return removed;
}

/** The first pixel of [from, to) that is further than `limit` from the mean, `to` where none is. */
function nextStray(photons: Float64Array, from: number, to: number, mean: number, limit: number): number {
  let i = from;
  while (i < to && Math.abs(photons[i]! - mean) <= limit) i++;
  return i;
}

function isFlat(photons: Float64Array): boolean {
  const value = photons[0]!;
  return photons.every((photon) => photon === value);
}

/** Photons around a frame of zeros from which chance does not make one, e⁻¹⁵ = 3·10⁻⁷. */
const NEVER_ZERO = 15;

/**
 * Frames in which nothing was recorded: all pixels are the same. A frame of zeros among frames of a few counted photons
 * is a measurement like theirs; to leave it out would make the light look brighter than it is.
 */
function emptyFrames(flat: readonly boolean[], patches: readonly Patch[], noise: NoiseLaw): boolean[] {
  const totals = patches.map((patch) => patch.data.reduce((sum, value) => sum + value, patch.outerSum));
  return flat.map((same, i) => {
    if (!same || totals[i] !== 0 || noise.floor > 0) return same;
    const around = totals.slice(Math.max(0, i - 3), i + 4);
    return around.reduce((sum, total) => sum + total, 0) > NEVER_ZERO * (around.length - 1);
  });
}

/**
 * Tells frames whose spot is saturated: a full pixel has a nearly full neighbour; a full pixel alone is a hot one. Full
 * is counted in stored counts, so a dark frame comes off pixel by pixel.
 */
function saturationOf(stack: Stack): (patch: Patch) => boolean {
  const { saturation, offset, gain } = stack.acquisition.detector;
  if (saturation === null) return () => false;
  const { dark } = stack;
  const darkest = dark === null ? offset : dark.reduce((a, b) => Math.max(a, b), 0);
  // single precision rounds the photons
  const fullest = (base: number): number => ((saturation - base) / gain) * (1 - 1e-6);
  const least = fullest(darkest);
  return ({ data, rectangle: { x0, y0, width } }) => {
    for (let i = 0; i < data.length; i++) {
      if (data[i]! < least) continue;
      const at = (y0 + Math.floor(i / width)) * stack.width + x0 + (i % width);
      const full = fullest(dark === null ? offset : dark[at]!);
      if (data[i]! < full) continue;
      const right = (i + 1) % width === 0 ? 0 : (data[i + 1] ?? 0);
      const below = data[i + width] ?? 0;
      if (right > full / 2 || below > full / 2) return true;
    }
    return false;
  };
}
