import { describe, expect, it } from "vitest";
import { fitPatch } from "../../src/frame/fit-spot.ts";
import { createEvaluation } from "../../src/frame/kernel.ts";
import { scoreSpot } from "../../src/frame/score-spot.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { COUNTING, draw, pictureOf, wholePatch } from "./pictures.ts";

const evaluation = createEvaluation(7);
const SIDE = 24;
const truth = Float64Array.of(50, 11.7, 11.4, 8, 1, 6, 0.1);
const mean = pictureOf(truth, SIDE, SIDE);

function average(values: readonly number[]): { mean: number; error: number } {
  const m = values.reduce((a, b) => a + b, 0) / values.length;
  const variance = values.reduce((a, b) => a + (b - m) ** 2, 0) / (values.length - 1);
  return { mean: m, error: Math.sqrt(variance / values.length) };
}

describe("a frame of 50 photons read against the truth", () => {
  const random = createRandom(31);
  const draws = Array.from({ length: 3000 }, () => wholePatch(draw(mean, COUNTING, random), SIDE, SIDE));
  const scored = draws.map((patch) => scoreSpot("map", patch, truth, COUNTING, evaluation)!);

  it("gives light, centre, Σ and background without bias", () => {
    for (let j = 0; j < 7; j++) {
      const { mean: m, error } = average(scored.map((s) => s.estimate[j]!));
      expect(Math.abs(m - truth[j]!)).toBeLessThan(4 * error);
    }
    const light = average(scored.map((s) => s.light.value));
    expect(Math.abs(light.mean - 50)).toBeLessThan(4 * light.error);
  });

  it("scatters as its covariance says", () => {
    for (let j = 0; j < 7; j++) {
      const { error } = average(scored.map((s) => s.estimate[j]!));
      expect((error ** 2 * draws.length) / scored[0]!.covariance[j * 8]!).toBeCloseTo(1, 0.7);
    }
    const { error } = average(scored.map((s) => s.light.value));
    expect((error ** 2 * draws.length) / scored[0]!.light.variance).toBeCloseTo(1, 0.7);
  });

  it("is unbiased where the maximum likelihood of the single frame is not", () => {
    const own = draws
      .slice(0, 600)
      .map((patch) => fitPatch("map", patch, truth, COUNTING))
      .filter((fit) => fit.converged)
      .map((fit) => (fit.parameters[3]! + fit.parameters[5]!) / 2);
    const single = average(own);
    expect(Math.abs(single.mean - 7)).toBeGreaterThan(4 * single.error);
  });
});

describe("a reference that is wrong", () => {
  it("in light and background alone costs no bias: a noise-free frame is read exactly", () => {
    const wrong = Float64Array.of(80, 11.7, 11.4, 8, 1, 6, 0.05);
    const { estimate } = scoreSpot("map", wholePatch(mean, SIDE, SIDE), wrong, COUNTING, evaluation)!;
    for (let j = 0; j < 7; j++) expect(estimate[j]!).toBeCloseTo(truth[j]!, 5);
  });

  it("in its width shifts the light by perVariance times the error", () => {
    const patch = wholePatch(mean, SIDE, SIDE);
    const read = (dxx: number, dxy: number, dyy: number): number => {
      const reference = truth.slice();
      reference[3]! += dxx;
      reference[4]! += dxy;
      reference[5]! += dyy;
      return scoreSpot("map", patch, reference, COUNTING, evaluation)!.light.value;
    };
    const { perVariance } = scoreSpot("map", patch, truth, COUNTING, evaluation)!.light;
    const h = 1e-4;
    const slopes = [
      (read(h, 0, 0) - read(-h, 0, 0)) / (2 * h),
      (read(0, h, 0) - read(0, -h, 0)) / (2 * h),
      (read(0, 0, h) - read(0, 0, -h)) / (2 * h),
    ];
    for (const [k, slope] of slopes.entries()) expect(perVariance[k]!).toBeCloseTo(slope, 3);
  });
});

describe("a frame without information", () => {
  it("is null where every pixel is excluded", () => {
    const patch = wholePatch(mean, SIDE, SIDE);
    patch.excluded = Array.from({ length: SIDE * SIDE }, (_, i) => i);
    expect(scoreSpot("map", patch, truth, COUNTING, evaluation)).toBeNull();
  });
});
