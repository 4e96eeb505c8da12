import { centreOf } from "../field/recording.ts";
import type { Scenario } from "../field/scenario.ts";
import type { Expectation } from "../field/synthesise.ts";
import { noiseLaw } from "../frame/cut.ts";
import {
  createEvaluation,
  evaluateMap,
  evaluateTrace,
  MAP_PARAMETERS,
  TRACE_PARAMETERS,
} from "../frame/kernel.ts";
import { invertSymmetric } from "../numerics/linear-algebra.ts";
import { fitLine, meanDiffusion } from "../transport/line.ts";

/** A value that a recording would give, with the smallest standard uncertainty that its light allows. */
export interface Expected {
  readonly value: number;
  readonly u: number;
}

/** What the widths' road can tell of a plain recording; µm and ns. */
export interface WidthsPrecision {
  /** µm²/ns */
  readonly diffusion: Expected;
  /** ns */
  readonly lifetime: Expected;
  /** L = √(Dτ), µm */
  readonly length: Expected;
}

/** One frame's information on its width and light, everything else of the spot being free. */
interface FrameInformation {
  readonly frame: number;
  readonly time: number;
  /** Expected photons. */
  readonly light: number;
  /** As the picture shows it, µm²: xx, xy, yy or xx. */
  readonly variance: number[];
  readonly covariance: Float64Array;
  /** Variance of the light with the width held, photons². */
  readonly lightVariance: number;
  /** How the fitted light follows a width that is held at a wrong value, photons/µm². */
  readonly perVariance: number[];
}

/**
 * The Cramér–Rao bound of D, τ and L by the widths' road: light, centre, width and background are free in each frame,
 * one line Σ₀ + 2Dt goes through the widths and, with the widths on that line, one exponential through the light.
 *
 * Fisher information of the frames at the truth, see `evaluateMap`; the rest is generalised least squares (Aitken 1936)
 * and linear propagation (JCGM 100:2008, 5.2). For plain diffusion with one lifetime and no glow of earlier pulses.
 *
 * @returns null where fewer than three frames after the pulse hold a spot, or the light tells nothing
 */
export function widthsPrecision(
  scenario: Scenario,
  { truth }: Pick<Expectation, "truth">,
): WidthsPrecision | null {
  const frames = scenario.recording.delays.flatMap((delay, i) => {
    const one = delay >= 0 ? frameInformation(scenario, truth, i) : null;
    return one === null ? [] : [one];
  });
  const line = frames.length < 3 ? null : fitLine(frames);
  if (line === null) return null;
  const n = frames.length;
  const shift = frames.map((f) => [...f.perVariance, ...f.perVariance.map((s) => 2 * f.time * s)]);
  // the light's own scatter, and what its frames share through the line
  const weights = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) weights[i * n + j] = bilinear(shift[i]!, shift[j]!, line.covariance);
    weights[i * n + i]! += frames[i]!.lightVariance;
  }
  if (!invertSymmetric(weights, n)) return null;
  const tau = truth.lifetime_ns;
  const first = frames[0]!.light;
  const slopes = frames.map(({ light, time }) => [light / first, (light * time) / tau ** 2]);
  const weighted = slopes.map((_, i) =>
    [0, 1].map((a) => slopes.reduce((sum, slope, j) => sum + weights[i * n + j]! * slope[a]!, 0)),
  );
  const decay = Float64Array.from([0, 0, 0, 0]);
  for (let i = 0; i < n; i++)
    for (let a = 0; a < 2; a++)
      for (let b = 0; b < 2; b++) decay[a * 2 + b]! += slopes[i]![a]! * weighted[i]![b]!;
  if (!invertSymmetric(decay, 2)) return null;

  const d = meanDiffusion(line);
  const components = line.intercept.length;
  const byD = components === 3 ? [0, 0, 0, 0.5, 0, 0.5] : [0, 1];
  const cross = shift.reduce((sum, each, i) => {
    const byLight = decay[2]! * weighted[i]![0]! + decay[3]! * weighted[i]![1]!;
    return sum + byLight * bilinear(each, byD, line.covariance);
  }, 0);
  const tauVariance = decay[3]!;
  const length2 = d.value * tau;
  const length2Variance = tau ** 2 * d.variance + d.value ** 2 * tauVariance + 2 * tau * d.value * cross;
  const length = Math.sqrt(Math.max(length2, 0));
  return {
    diffusion: { value: d.value, u: Math.sqrt(d.variance) },
    lifetime: { value: tau, u: Math.sqrt(tauVariance) },
    length: {
      value: length,
      u: length > 0 ? Math.sqrt(Math.max(length2Variance, 0)) / (2 * length) : length2Variance ** 0.25,
    },
  };
}

/** Null where the frame's light does not determine a spot. */
function frameInformation(
  scenario: Scenario,
  truth: Expectation["truth"],
  i: number,
): FrameInformation | null {
  const { rows, columns, pixelX: pixel, delays, psfVariance } = scenario.recording;
  const map = scenario.kind === "map";
  const { photons, covariance_um2: sigma } = truth.frames[i]!;
  const area = pixel ** 2;
  const [x, y] = centreOf(scenario.recording, i);
  // pixels average over their area, which adds a twelfth of a pixel to the variance
  const spare = psfVariance / area + 1 / 12;
  const [xx, xy, yy] = [sigma[0] / area + spare, sigma[1] / area, sigma[2] / area + spare];
  const widths = map ? [xx, xy, yy] : [xx];
  const at = map
    ? [photons, x / pixel, y / pixel, ...widths, scenario.background]
    : [photons, x / pixel, ...widths, scenario.background];
  const n = map ? MAP_PARAMETERS : TRACE_PARAMETERS;
  const start = map ? 3 : 2;
  const evaluation = createEvaluation(n);
  // the information depends on the mean alone, so the picture itself may stay empty
  const patch = {
    rectangle: { x0: 0, y0: 0, width: columns, height: rows },
    data: new Float32Array(columns * rows),
    outerCount: 0,
    outerSum: 0,
    excluded: [],
  };
  const evaluate = map ? evaluateMap : evaluateTrace;
  evaluate(patch, Float64Array.from(at), noiseLaw(scenario.acquisition.detector), evaluation);
  const { information } = evaluation;
  const full = information.slice();
  if (!invertSymmetric(full, n)) return null;
  const places = widths.map((_, a) => start + a);
  const covariance = Float64Array.from(
    places.flatMap((a) => places.map((b) => full[a * n + b]! * area ** 2)),
  );
  const free = Array.from({ length: n }, (_, a) => a).filter((a) => !places.includes(a));
  const inner = Float64Array.from(free.flatMap((a) => free.map((b) => information[a * n + b]!)));
  if (!invertSymmetric(inner, free.length)) return null;
  const perVariance = places.map(
    (w) => -free.reduce((sum, b, k) => sum + inner[k]! * information[b * n + w]!, 0) / area,
  );
  return {
    frame: i,
    time: delays[i]!,
    light: photons,
    variance: widths.map((value) => value * area),
    covariance,
    lightVariance: inner[0]!,
    perVariance,
  };
}

/** aᵀCb */
function bilinear(a: readonly number[], b: readonly number[], c: Float64Array): number {
  const n = a.length;
  let sum = 0;
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) sum += a[i]! * c[i * n + j]! * b[j]!;
  return sum;
}
