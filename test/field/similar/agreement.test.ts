import { describe, expect, it } from "vitest";
import { meanFrames } from "../../../src/field/mean-frames.ts";
import type { Recording } from "../../../src/field/recording.ts";
import type { SimilarProblem } from "../../../src/field/similar/problem.ts";
import { similarLight } from "../../../src/field/similar/similar-light.ts";
import { travelled } from "../../../src/field/similar/travelled.ts";
import { movingTime } from "../../../src/field/travel.ts";
import { difference, picture, problem, TURNED } from "./problems.ts";

const CENTRE = [1.53, 1.37] as const;

function mediumOf(p: SimilarProblem) {
  const area = 2 * Math.PI * Math.sqrt(p.start[0] * p.start[2] - p.start[1] ** 2);
  return { ...p, repulsion: p.repulsion * area, annihilation: p.annihilation * area };
}

/** The Fourier solver, which integrates over pixels and slit exactly. */
function spectral(p: SimilarProblem) {
  const map = p.kind === "map";
  const recording: Recording = {
    columns: 32,
    rows: map ? 30 : 1,
    pixelX: p.pixel,
    pixelY: map ? p.pixel : (p.slit ?? Infinity),
    delays: p.delays,
    gate: p.gate,
    period: p.period,
    responseSigma: p.responseSigma,
    psfVariance: p.blurVariance,
    centre: map ? CENTRE : [CENTRE[0], 0],
    drift: [0, 0],
  };
  return meanFrames(mediumOf(p), { amount: 1, covariance: p.start }, recording, {
    tolerance: p.period === null ? 1e-7 : 3e-6,
    clearance: p.period === null ? 7 : 5.5,
    resolution: p.period === null ? 3 : 2.5,
  });
}

function disagreement(p: SimilarProblem): number {
  const light = similarLight(p);
  const expected = spectral(p);
  const map = p.kind === "map";
  const grid = { x0: -CENTRE[0], y0: -CENTRE[1], pixel: p.pixel, width: 32, height: map ? 30 : 1 };
  const area = map ? p.pixel ** 2 : p.pixel;
  return Math.max(
    ...p.delays.map((_, i) => {
      const truth = expected.light[i]!;
      return Math.max(
        difference(
          picture(light, i, grid),
          expected.frames[i]!.map((value) => value / area),
        ),
        Math.abs(light.amount(i) / truth.amount - 1),
        Math.abs(light.caughtShare(i) - truth.caughtShare),
      );
    }),
  );
}

const PIXELS = { pixel: 0.1, delays: [0, 0.7, 3], gate: 0.4 };

describe("the Fourier solver agrees to 1e-5 of the peak", () => {
  it.each<[string, Partial<SimilarProblem>]>([
    ["annihilation", { annihilation: 0.5 }],
    ["annihilation and capture, blurred", { annihilation: 1, capture: 0.15, blurVariance: 0.03 }],
    ["turned spot and tensor, annihilation", { ...TURNED, annihilation: 0.5 }],
    [
      "turned spot and tensor, capture, blur that is round in the picture only",
      { ...TURNED, capture: 0.15, blurVariance: 0.03 },
    ],
    [
      "elliptical spot, isotropic diffusion",
      { start: [0.12, 0.02, 0.07], annihilation: 0.5, blurVariance: 0.02 },
    ],
    ["plain, turned", TURNED],
    [
      "behind a slit, annihilation and capture",
      { kind: "trace", slit: 0.3, annihilation: 0.5, capture: 0.1, blurVariance: 0.02 },
    ],
    ["trace without a slit", { kind: "trace", annihilation: 0.5 }],
    ["behind a slit, plain", { kind: "trace", slit: 0.3, blurVariance: 0.02 }],
    ["repulsion", { repulsion: 1 }],
    ["repulsion, fast and blurred", { repulsion: 3, diffusion: [0.05, 0, 0.05], blurVariance: 0.03 }],
    ["turned spot and tensor, repulsion", { ...TURNED, repulsion: 0.5 }],
    ["behind a slit, repulsion", { kind: "trace", slit: 0.3, repulsion: 1, blurVariance: 0.02 }],
    ["repulsion, annihilation and capture", { repulsion: 1, annihilation: 0.5, capture: 0.15 }],
    ["with the instrument's response", { annihilation: 0.5, responseSigma: 0.2 }],
    ["no motion", { diffusion: [0, 0, 0], annihilation: 0.1, capture: 0.1 }],
  ])("%s", (_, part) => {
    expect(disagreement(problem(PIXELS, part))).toBeLessThan(1e-5);
  });

  it.each<[string, Partial<SimilarProblem>]>([
    ["annihilation between pulses", { annihilation: 0.5, period: 5 }],
    ["annihilation and capture", { annihilation: 1, capture: 0.1, period: 9, delays: [-1, 0.7, 3] }],
    ["turned", { ...TURNED, annihilation: 0.5, period: 9, delays: [0, 7] }],
    ["repulsion", { repulsion: 1, period: 4, lifetime: 2, delays: [-0.5, 0.7, 3] }],
  ])("pulse after pulse until the steady state: %s", (_, part) => {
    expect(disagreement(problem(PIXELS, part))).toBeLessThan(1e-5);
  });

  it.each<[string, Partial<SimilarProblem>]>([
    ["annihilation", { annihilation: 0.5 }],
    ["turned, with capture", { ...TURNED, annihilation: 1.5, capture: 0.2 }],
    ["repulsion", { repulsion: 5 }],
    ["turned, with repulsion and annihilation", { ...TURNED, repulsion: 2, annihilation: 0.3 }],
  ])("on how far excitons travel: %s", (_, part) => {
    const p = problem(part);
    const d = (p.diffusion[0] + p.diffusion[2]) / 2;
    expect(travelled(p) / (d * movingTime(mediumOf(p), { amount: 1, covariance: p.start }))).toBeCloseTo(
      1,
      5,
    );
  });
});

describe("earlier pulses", () => {
  it.each<[string, Partial<SimilarProblem>]>([
    ["capture", { capture: 0.2 }],
    ["plain", {}],
  ])("without annihilation are the sum of single pulses at t + jT: %s", (_, part) => {
    const period = 5;
    const delays = Array.from({ length: 80 }, (_, j) => 1.2 + j * period);
    const single = similarLight(problem(part, { delays }));
    const train = similarLight(problem(part, { delays: [1.2], period }));
    const grid = { x0: -1.5, y0: -1.4, pixel: 0.15, width: 21, height: 20 };
    const sum = new Float64Array(21 * 20);
    let amount = 0;
    delays.forEach((_, j) => {
      amount += single.amount(j);
      picture(single, j, grid).forEach((value, i) => {
        sum[i] = sum[i]! + value;
      });
    });
    expect(train.amount(0) / amount).toBeCloseTo(1, 6);
    expect(difference(picture(train, 0, grid), sum)).toBeLessThan(1e-5);
  });

  it("that never end are refused", () => {
    expect(() => similarLight(problem({ period: 5, lifetime: Infinity }))).toThrow(/give a lifetime/);
    expect(() => similarLight(problem({ period: 5, capture: 0.1, trapLifetime: Infinity }))).toThrow(
      /give a lifetime/,
    );
  });
});
