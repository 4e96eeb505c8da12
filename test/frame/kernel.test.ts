import { describe, expect, it } from "vitest";
import { cutPatch } from "../../src/frame/cut.ts";
import { fitPatch } from "../../src/frame/fit-spot.ts";
import type { Evaluation, Parameters } from "../../src/frame/kernel.ts";
import { createEvaluation, evaluateMap, evaluateTrace } from "../../src/frame/kernel.ts";
import type { NoiseLaw, Patch } from "../../src/frame/patch.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { CAMERA, COUNTING, draw, meanOf, pictureOf, wholePatch } from "./pictures.ts";

/** Score and information by a plain double loop over pixels, with central differences of the model. */
function naive(patch: Patch, p: Parameters, noise: NoiseLaw): { score: number[]; information: number[][] } {
  const n = p.length;
  const score = new Array<number>(n).fill(0);
  const information = Array.from({ length: n }, () => new Array<number>(n).fill(0));
  const add = (x: number, y: number, residual: (mean: number) => number, count: number): void => {
    const mean = meanOf(p, x, y);
    const variance = noise.excess * Math.max(mean, 0) + noise.floor;
    const slopes = Array.from(p, (value, j) => {
      const h = 1e-5 * Math.max(Math.abs(value), 0.1);
      const shifted = (by: number) => p.map((each, k) => (k === j ? each + by : each));
      return (meanOf(shifted(h), x, y) - meanOf(shifted(-h), x, y)) / (2 * h);
    });
    for (let a = 0; a < n; a++) {
      score[a]! += (residual(mean) / variance) * slopes[a]!;
      for (let b = 0; b < n; b++) information[a]![b]! += (count * slopes[a]! * slopes[b]!) / variance;
    }
  };
  const { x0, y0, width } = patch.rectangle;
  patch.data.forEach((value, i) => {
    if (patch.excluded.includes(i)) return;
    add(x0 + (i % width), y0 + Math.floor(i / width), (mean) => value - mean, 1);
  });
  // the pool: pixels so far away that only the background is left
  if (patch.outerCount > 0) {
    add(1e6, 1e6, (mean) => patch.outerSum - patch.outerCount * mean, patch.outerCount);
  }
  return { score, information };
}

function evaluate(patch: Patch, p: Parameters, noise: NoiseLaw): Evaluation {
  const out = createEvaluation(p.length);
  (p.length === 4 ? evaluateTrace : evaluateMap)(patch, p, noise, out);
  return out;
}

/** Entries relative to √(I_aa·I_bb), the score relative to √I_aa, both times the accuracy of the differences. */
function expectAlike(found: Evaluation, { score, information }: ReturnType<typeof naive>): void {
  const n = score.length;
  for (let a = 0; a < n; a++) {
    const size = Math.sqrt(information[a]![a]!);
    expect(Math.abs(found.score[a]! - score[a]!) / size).toBeLessThan(
      1e-6 * (1 + Math.abs(score[a]! / size)),
    );
    for (let b = 0; b < n; b++) {
      const scale = size * Math.sqrt(information[b]![b]!);
      expect(Math.abs(found.information[a * n + b]! - information[a]![b]!) / scale).toBeLessThan(1e-7);
    }
  }
}

const turned = Float64Array.of(3000, 14.3, 11.6, 9.2, 3.1, 5.4, 0.7);
/** Where the sums are evaluated: off the truth, as in the middle of a fit. */
const beside = Float64Array.of(2700, 14.9, 11.1, 8.1, 2.2, 6.3, 0.9);

describe("score and Fisher information of a spot", () => {
  it.each([
    ["photon counting", COUNTING],
    ["an amplified camera with read noise", CAMERA],
  ])("are those of a plain loop over a turned elliptical spot under %s", (_, noise) => {
    const patch = wholePatch(draw(pictureOf(turned, 30, 24), noise, createRandom(1)), 30, 24);
    expectAlike(evaluate(patch, beside, noise), naive(patch, beside, noise));
  });

  it("leave out excluded pixels", () => {
    const patch = wholePatch(draw(pictureOf(turned, 30, 24), COUNTING, createRandom(2)), 30, 24);
    patch.excluded = [0, 12 * 30 + 14, 12 * 30 + 15, 700];
    patch.data[12 * 30 + 14] = 1e6;
    expectAlike(evaluate(patch, beside, COUNTING), naive(patch, beside, COUNTING));
    expect(evaluate(patch, beside, COUNTING).pixels).toBe(30 * 24 - 4);
  });

  it("take pooled pixels as so many that hold the background alone", () => {
    const patch = wholePatch(draw(pictureOf(turned, 30, 24), COUNTING, createRandom(3)), 30, 24);
    patch.outerCount = 500;
    patch.outerSum = 412;
    expectAlike(evaluate(patch, beside, COUNTING), naive(patch, beside, COUNTING));
  });

  it.each([
    ["beyond the left border", Float64Array.of(900, -6, 8.2, 9, 2, 7, 0.4)],
    ["beyond the lower right corner", Float64Array.of(900, 27.5, 26.1, 9, -2, 7, 0.4)],
    ["narrower than a pixel", Float64Array.of(900, 12.3, 9.7, 0.09, 0.02, 0.12, 0.4)],
    ["a needle on the diagonal", Float64Array.of(900, 12.3, 9.7, 20, 19.5, 20, 0.4)],
    ["wider than the picture", Float64Array.of(1e5, 12.3, 9.7, 900, 100, 700, 0.4)],
  ])("hold for a spot %s", (_, p) => {
    const patch = wholePatch(draw(pictureOf(p, 24, 20), COUNTING, createRandom(4)), 24, 20);
    expectAlike(evaluate(patch, p, COUNTING), naive(patch, p, COUNTING));
  });

  it("count coordinates of a cut patch in the whole picture", () => {
    const picture = draw(pictureOf(turned, 30, 24), CAMERA, createRandom(5));
    const patch = cutPatch(picture, 30, { x0: 4, y0: 3, width: 21, height: 17 });
    expectAlike(evaluate(patch, beside, CAMERA), naive(patch, beside, CAMERA));
  });

  it("hold for a trace", () => {
    const p = Float64Array.of(800, 31.4, 22, 1.3);
    const trace = draw(pictureOf(Float64Array.of(900, 30.8, 20, 1.1), 64), COUNTING, createRandom(6));
    const patch = wholePatch(trace, 64);
    patch.excluded = [30];
    expectAlike(evaluate(patch, p, COUNTING), naive(patch, p, COUNTING));
  });

  it("give a Pearson χ² that sums the squared residuals over the noise law", () => {
    const patch = wholePatch(draw(pictureOf(turned, 30, 24), CAMERA, createRandom(7)), 30, 24);
    patch.excluded = [40];
    let chi2 = 0;
    patch.data.forEach((value, i) => {
      const mean = meanOf(beside, i % 30, Math.floor(i / 30));
      if (i !== 40) chi2 += (value - mean) ** 2 / (2 * mean + 9);
    });
    expect(evaluate(patch, beside, CAMERA).pearson / chi2).toBeCloseTo(1, 6);
  });
});

describe("pooling the pixels far from the spot", () => {
  it("fits the same spot with the same uncertainties as the whole picture", () => {
    const p = Float64Array.of(4000, 41.3, 37.6, 12, 4, 8, 0.6);
    const picture = draw(pictureOf(p, 90, 80), COUNTING, createRandom(8));
    const whole = fitPatch("map", wholePatch(picture, 90, 80), p, COUNTING);
    const pooled = fitPatch(
      "map",
      cutPatch(picture, 90, { x0: 18, y0: 19, width: 47, height: 38 }),
      p,
      COUNTING,
    );
    for (let j = 0; j < 7; j++) {
      const u = Math.sqrt(whole.covariance[j * 8]!);
      expect(Math.abs(pooled.parameters[j]! - whole.parameters[j]!) / u).toBeLessThan(1e-3);
      expect(Math.sqrt(pooled.covariance[j * 8]!) / u).toBeCloseTo(1, 4);
    }
  });
});
