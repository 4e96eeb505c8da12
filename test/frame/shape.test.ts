import { describe, expect, it } from "vitest";
import { fitPatch } from "../../src/frame/fit-spot.ts";
import { shapeScore } from "../../src/frame/shape.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { COUNTING, draw, pictureOf, wholePatch } from "./pictures.ts";

const SIDE = 61;
const round = (n: number, s2: number): Float64Array => Float64Array.of(n, 30.2, 29.8, s2, 0, s2, 0);
const line = (n: number, s2: number): Float64Array => Float64Array.of(n, 60.2, s2, 0);

const sum = (a: Float64Array, b: Float64Array, background: number): Float64Array =>
  a.map((value, i) => value + b[i]! + background);

/** Excess kurtosis of a mixture of two Gaussians of equal centre: ⟨σ⁴⟩/⟨σ²⟩² − 1 times 2 (map) or 3 (trace). */
function excess(share: number, narrow: number, wide: number, factor: 2 | 3): number {
  const second = share * narrow + (1 - share) * wide;
  const fourth = share * narrow ** 2 + (1 - share) * wide ** 2;
  return factor * (fourth / second ** 2 - 1);
}

describe("the shape q of a spot", () => {
  const n = 1e5;

  // without background the maximum-likelihood spot has the data's moments, and q is the kurtosis exactly
  it.each([0.1, 0.3, 0.5])("is half the excess kurtosis of a core on a foot on a map, share %f", (share) => {
    const mixture = sum(
      pictureOf(round(share * n, 9), SIDE, SIDE),
      pictureOf(round((1 - share) * n, 12), SIDE, SIDE),
      1e-6,
    );
    const patch = wholePatch(mixture, SIDE, SIDE);
    const { parameters } = fitPatch("map", patch, round(n, 11), COUNTING);
    const { score, information } = shapeScore("map", patch, parameters, COUNTING);
    // five standard deviations hold all but a few per cent of the fourth moment's excess
    expect(score / information / (excess(share, 9, 12, 2) / 2)).toBeCloseTo(1, 1);
    expect(score).toBeGreaterThan(0);
  });

  it("is the excess kurtosis over √24 on a trace", () => {
    const mixture = sum(pictureOf(line(0.3 * n, 40), 121), pictureOf(line(0.7 * n, 55), 121), 1e-6);
    const patch = wholePatch(mixture, 121);
    const { parameters } = fitPatch("trace", patch, line(n, 50), COUNTING);
    const { score, information } = shapeScore("trace", patch, parameters, COUNTING);
    expect(score / information / (excess(0.3, 40, 55, 3) / Math.sqrt(24))).toBeCloseTo(1, 1);
  });

  it("is negative for a flat top", () => {
    // a Gaussian with a third of its squared density taken away, as annihilation does
    const gaussian = pictureOf(round(n, 11), SIDE, SIDE);
    const top = Math.max(...gaussian);
    const patch = wholePatch(
      gaussian.map((g) => g * (1 - (0.3 * g) / top) + 0.5),
      SIDE,
      SIDE,
    );
    const { parameters } = fitPatch("map", patch, round(n, 11), COUNTING);
    const { score, information } = shapeScore("map", patch, parameters, COUNTING);
    expect(score * Math.sqrt(1 / information)).toBeLessThan(-10);
  });

  it("is none in a turned Gaussian: its score scatters with its information about zero", () => {
    const p = Float64Array.of(5000, 30.2, 29.8, 12, 4, 8, 0.5);
    const mean = pictureOf(p, SIDE, SIDE);
    const random = createRandom(41);
    const pulls = Array.from({ length: 120 }, () => {
      const patch = wholePatch(draw(mean, COUNTING, random), SIDE, SIDE);
      const { score, information } = shapeScore(
        "map",
        patch,
        fitPatch("map", patch, p, COUNTING).parameters,
        COUNTING,
      );
      return score / Math.sqrt(information);
    });
    const average = pulls.reduce((a, b) => a + b, 0) / 120;
    const variance = pulls.reduce((a, b) => a + (b - average) ** 2, 0) / 119;
    expect(Math.abs(average)).toBeLessThan(4 / Math.sqrt(120));
    expect(Math.abs(variance - 1)).toBeLessThan(0.52);
  });

  it("does not follow errors of light, centre, width and background", () => {
    const p = Float64Array.of(5000, 30.2, 29.8, 12, 4, 8, 0.5);
    const patch = wholePatch(pictureOf(p, SIDE, SIDE), SIDE, SIDE);
    const wrong = p.map((value, j) => value * [1.02, 1.002, 0.998, 1.02, 1, 0.98, 1.02][j]!);
    const { score, information } = shapeScore("map", patch, wrong, COUNTING);
    expect(Math.abs(score / Math.sqrt(information))).toBeLessThan(0.05);
  });

  it("leaves out excluded pixels", () => {
    const p = Float64Array.of(5000, 30.2, 29.8, 12, 4, 8, 0.5);
    const patch = wholePatch(pictureOf(p, SIDE, SIDE), SIDE, SIDE);
    patch.data[30 * SIDE + 30] = 1e5;
    patch.excluded = [30 * SIDE + 30];
    expect(Math.abs(shapeScore("map", patch, p, COUNTING).score)).toBeLessThan(1e-3);
  });
});
