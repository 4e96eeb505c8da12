import { sigmaOfFwhm } from "../decay/gaussian-exponential.ts";
import type { SimilarLight } from "../field/similar/problem.ts";
import { similarLight } from "../field/similar/similar-light.ts";
import type { StackFits } from "../field/stack-fit/candidates.ts";
import { fitCandidates } from "../field/stack-fit/candidates.ts";
import type { Symmetry, Values } from "../field/stack-fit/parameters.ts";
import { problemOf, valuesOf } from "../field/stack-fit/parameters.ts";
import type { StackData, StackFrame } from "../field/stack-fit/stack-data.ts";
import { trimPatch } from "../field/stack-fit/stack-data.ts";
import { rectangleAround } from "../frame/cut.ts";
import { excludeFrom } from "../frame/outliers.ts";
import type { NoiseLaw, Patch } from "../frame/patch.ts";
import { pixelVariance } from "../frame/patch.ts";
import { prepareFrames } from "../frame/prepare.ts";
import { referenceAt } from "../frame/references.ts";
import { findStrikes } from "../frame/strikes.ts";
import { chiSquareUpperTail } from "../numerics/distributions.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { Stack } from "../stack/stack.ts";
import { meanDiffusion } from "../transport/line.ts";
import { perAxis } from "../transport/width.ts";
import type { AnalysisOptions } from "./analysis.ts";
import { firstShape, halves } from "./evidence.ts";
import { withFoot } from "./footed-start.ts";
import { diffusionOf, type Joint } from "./joint.ts";
import type { Reading } from "./reading.ts";
import { sparePixels } from "./spared-pixels.ts";

/** How far from the centre pixels are looked at one by one, in standard deviations of the frame's spot. */
const REACH = 5;

/** The whole-stack fits of a recording with what they were fitted to. */
export interface WholeStack {
  readonly data: StackData;
  readonly fits: StackFits;
}

/**
 * Fits the whole stack at once, started from widths and decay; null where it cannot be: no decay to start from, light
 * that does not stand for the density, or a response that is not Gaussian.
 */
export function fitWholeStack(
  reading: Reading,
  joint: Joint,
  onCandidate?: AnalysisOptions["onCandidate"],
): WholeStack | null {
  const { acquisition } = reading.stack;
  if (joint.decay === null || acquisition.sample.emissionOrder !== 1) return null;
  if (acquisition.response?.kind === "sampled") return null;
  const data = stackDataOf(reading);
  const annihilation = reading.decays?.fits.annihilation ?? null;
  const hint = annihilation?.converged ? annihilation.parameters[annihilation.names.indexOf("k_n0")]! : null;
  const symmetry = symmetryOf(reading);
  const start = startOf(reading, joint, data);
  const fitAll = (to: StackData, form: Symmetry, from: Values): StackFits | null =>
    fitCandidates(to, form, from, hint, isDipolar(acquisition) ? repulsionHint(reading) : null, onCandidate);
  const first = fitAll(data, symmetry, start);
  const spare = (to: StackData): StackData => (first === null ? to : sparePixels(to, first.preferred));
  const spared = spare(data);
  const gaussian = { data: spared, fits: spared === data ? first : fitAll(spared, symmetry, start) };
  const ample = (): StackData => spare(stackDataOf(reading, FOOT));
  const { fits, data: used } = withFoot(gaussian, symmetry, start, firstShape(reading), ample, fitAll);
  return fits === null ? null : { data: used, fits };
}

/** Whether the acquisition tells of excitons that are apart from their holes in another layer, and so repel each other. */
export function isDipolar({ sample }: Acquisition): boolean {
  return sample.blueShift !== null || sample.layerDistance !== null;
}

/** β by D at first, D(1 + β/4) of a Gaussian spot, over D at last, when the excitons are few; to start a fit from. */
function repulsionHint(reading: Reading): number {
  const { early, late } = halves(reading);
  const ratio = late.value > 0 ? early.value / late.value : 1;
  return Math.min(Math.max(4 * (ratio - 1), 0.3), 6);
}

/**
 * Mean light of a frame over the whole picture by the preferred model, photons per pixel, row-major; false where the
 * model leaves the frame out. The model is worked out when it is first asked for.
 */
export function wholeLightOf(
  { data, fits }: WholeStack,
  { width, height }: Stack,
): (frame: number, into: Float64Array) => boolean {
  const { names, parameters } = fits.preferred;
  const value = valuesOf(names, parameters);
  const { kind, pixel } = data;
  const scale = value.amplitude! * (kind === "map" ? pixel * pixel : pixel);
  let light: SimilarLight | null = null;
  return (frame, into) => {
    const k = data.frames.findIndex((each) => each.frame === frame);
    if (k < 0) return false;
    light ??= similarLight(problemOf(data, value));
    const { shift, background } = data.frames[k]!;
    const x0 = -value.x! - shift[0];
    const y0 = kind === "map" ? -value.y! - shift[1] : 0;
    light.fill(k, { x0, y0, pixel, width, height }, into);
    const level = value.background! + background;
    for (let i = 0; i < into.length; i++) into[i] = scale * into[i]! + level;
    return true;
  };
}

/**
 * The frames that a model of the light must describe: all but those set aside for what they are.
 *
 * @param room times as far around the spot as its width asks for
 */
export function stackDataOf(reading: Reading, room = 1): StackData {
  const { stack, frames, flags, models } = reading;
  const { acquisition } = stack;
  const { kind, pixel } = frames;
  const modelledBefore = acquisition.period !== null || acquisition.response !== null;
  const first = reading.widths[0]!.frame;
  const centre = models.centre(first);
  const { patches, reachOf } = roomFor(reading, room);
  const offsets = backgroundOffsets(patches, frames.noise);
  const used: StackFrame[] = [];
  for (const [i, list] of flags.entries()) {
    if (list.some((flag) => flag === "saturated" || flag === "empty" || flag === "fit-failed")) continue;
    if (list.includes("before-pulse") && !modelledBefore) continue;
    const variance = perAxis({ variance: models.variance(i) });
    const at = models.centre(i);
    const reach = reachOf(i) + 2;
    const rectangle = rectangleAround(
      [at[0] / pixel, at[1] / pixel],
      [reach, kind === "map" ? reach : 0],
      stack.width,
      stack.height,
    );
    const before = list.includes("before-pulse");
    used.push({
      frame: i,
      delay: acquisition.time.delays[i]!,
      patch: before ? patches[i]! : trimPatch(patches[i]!, rectangle),
      shift: [at[0] - centre[0], at[1] - centre[1]],
      background: offsets[i]!,
      variance,
    });
  }
  const { response } = acquisition;
  return {
    kind,
    pixel,
    noise: frames.noise,
    frames: used,
    gate: acquisition.time.gate,
    responseSigma: response?.kind === "gaussian" ? sigmaOfFwhm(response.fwhm) : 0,
    period: acquisition.period,
    slit: acquisition.slit?.width.value ?? null,
    blurVariance: acquisition.space.psfFwhm === null ? 0 : sigmaOfFwhm(acquisition.space.psfFwhm.value) ** 2,
  };
}

/**
 * Patches wide enough for the free excitons, and how far to look in each frame, pixels. Where traps hold the widths back
 * the free ones still spread as the early frames do, and their light must not be taken for background; nor that of earlier
 * pulses, weaker the older it is but wider: e^(−r²/2σ²) of it counts as far as e^(−REACH²/2) does of the newest.
 */
function roomFor(
  reading: Reading,
  room: number,
): { patches: readonly Patch[]; reachOf: (frame: number) => number } {
  const { stack, frames, models, times, widths, line } = reading;
  const { early } = halves(reading);
  const free = Math.max(early.value, meanDiffusion(line).value, 0);
  const start = Math.max(...models.variance(widths[0]!.frame).filter((_, a) => a !== 1));
  const glow = glowOf(reading);
  const reachOf = (i: number): number => {
    const measured = Math.max(...models.variance(i).filter((_, a) => a !== 1));
    const spread = start + 2 * FREER * free * Math.max(times[i]!, 0);
    const squares = glow.map(
      ({ later, weight }) => (spread + 2 * FREER * free * later) * (REACH ** 2 + 2 * Math.log(weight)),
    );
    return (
      (room * Math.sqrt(Math.max(REACH ** 2 * measured, REACH ** 2 * spread, ...squares))) / frames.pixel
    );
  };
  const needed = reachOf(widths.at(-1)!.frame);
  const { rectangle } = frames;
  const have = Math.max(rectangle.width, frames.kind === "map" ? rectangle.height : 0) / 2;
  const whole = rectangle.width === stack.width && rectangle.height === stack.height;
  if (have >= needed || whole) return { patches: frames.patches, reachOf };
  const wider = prepareFrames(stack, (1.05 * needed) / have);
  for (const [i, patch] of wider.patches.entries()) {
    excludeFrom(patch, findStrikes(frames.kind, patch, referenceAt(frames, models, i), frames.noise));
  }
  return { patches: wider.patches, reachOf };
}

/** How much older earlier pulses are, and what part of them is left: until they add nothing within the reach. */
function glowOf({ stack, decays }: Reading): { later: number; weight: number }[] {
  const { period } = stack.acquisition;
  const decay = decays?.fits[decays.preferred] ?? null;
  if (period === null || decay === null) return [];
  const glow: { later: number; weight: number }[] = [];
  for (let later = period; later < (REACH ** 2 / 2) * decay.amplitudeAveraged.value; later += period) {
    glow.push({ later, weight: Math.exp(-later / decay.amplitudeAveraged.value) });
  }
  return glow;
}

/**
 * How each frame's background differs from the common one, photons per pixel, by the pixels far from any exciton alone;
 * zeros where one background serves all frames, or where the spot fills the picture and nothing can be said.
 */
function backgroundOffsets(patches: readonly Patch[], noise: NoiseLaw): number[] {
  const count = patches.reduce((sum, patch) => sum + patch.outerCount, 0);
  const level = patches.reduce((sum, patch) => sum + patch.outerSum, 0) / Math.max(count, 1);
  const none = patches.map(() => 0);
  if (patches.some((patch) => patch.outerCount < FAR_PIXELS)) return none;
  const chi2 = patches.reduce((sum, { outerCount, outerSum }) => {
    return sum + (outerSum - outerCount * level) ** 2 / (outerCount * pixelVariance(noise, level));
  }, 0);
  if (chiSquareUpperTail(chi2, patches.length - 1) > 1e-3) return none;
  return patches.map(({ outerCount, outerSum }) => outerSum / outerCount - level);
}

/** Pixels that a frame's background needs to be told from the others'. */
const FAR_PIXELS = 200;

/** A foot may be some times as wide as the Gaussian that is read on core and foot together. */
const FOOT = 1.8;

/** Allowance for free excitons that are faster than the early frames show. */
const FREER = 1.5;

/** Standard uncertainties from which a spot is taken as elliptical, or its motion as a tensor. */
const CLEARLY = 4;

function symmetryOf({ line }: Reading): Symmetry {
  if (line.intercept.length === 1) return { start: "round", diffusion: "isotropic" };
  const differs = (c: readonly number[], at: number): boolean => {
    const v = (i: number, j: number): number => line.covariance[(at + i) * 6 + at + j]!;
    const uDifference = Math.sqrt(v(0, 0) + v(2, 2) - 2 * v(0, 2));
    return Math.abs(c[0]! - c[2]!) > CLEARLY * uDifference || Math.abs(c[1]!) > CLEARLY * Math.sqrt(v(1, 1));
  };
  const tensor = differs(line.diffusion, 3);
  return {
    start: tensor || differs(line.intercept, 0) ? "free" : "round",
    diffusion: tensor ? "tensor" : "isotropic",
  };
}

function startOf(reading: Reading, joint: Joint, data: StackData): Values {
  const { line, models, widths, light, stack } = reading;
  const symmetry = symmetryOf(reading);
  const first = widths[0]!.frame;
  const [x, y] = models.centre(first);
  const spare = data.pixel ** 2 / 12 + data.blurVariance;
  const tau = joint.decay!.amplitudeAveraged.value;
  const delay = stack.acquisition.time.delays[first]!;
  const mean = (c: readonly number[]): number => (c.length === 3 ? (c[0]! + c[2]!) / 2 : c[0]!);
  const d = Math.max(diffusionOf(reading, joint).value, 1e-3 * (mean(line.intercept) / tau));
  const least = 0.2 * mean(line.intercept);
  const start = line.intercept.map((value, a) => (a === 1 ? value : Math.max(value - spare, least)));
  return {
    amplitude: Math.max(light.value[first]!, 1) * Math.exp(delay / tau),
    x,
    y,
    tau,
    background: Math.max(models.background(first), 1e-6),
    ...(symmetry.start === "free"
      ? { s_xx: start[0]!, s_xy: start[1]!, s_yy: start[2]! }
      : { s: mean(start) }),
    ...(symmetry.diffusion === "tensor"
      ? { D_xx: line.diffusion[0]!, D_xy: line.diffusion[1]!, D_yy: line.diffusion[2]! }
      : { D: d }),
  };
}
