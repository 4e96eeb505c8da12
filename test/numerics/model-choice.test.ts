import { describe, expect, it } from "vitest";
import { akaikeWeights, birgeFactor, correctedAkaike } from "../../src/numerics/model-choice.ts";

describe("correctedAkaike", () => {
  it("is χ² + 2k + 2k(k+1)/(n−k−1), by hand for χ² = 10, k = 3, n = 12", () => {
    expect(correctedAkaike(10, 3, 12)).toBe(10 + 6 + 24 / 8);
  });

  it("is infinite where the points are too few to tell", () => {
    expect(correctedAkaike(0, 3, 4)).toBe(Number.POSITIVE_INFINITY);
  });
});

describe("akaikeWeights", () => {
  it("gives the weights of differences 0, 2 and 7 (by hand: 1, e^−1, e^−3.5 over their sum)", () => {
    const sum = 1 + Math.exp(-1) + Math.exp(-3.5);
    const weights = akaikeWeights([102, 100, 107]);
    expect(weights[0]!).toBeCloseTo(Math.exp(-1) / sum, 12);
    expect(weights[1]!).toBeCloseTo(1 / sum, 12);
    expect(weights[2]!).toBeCloseTo(Math.exp(-3.5) / sum, 12);
  });

  it("gives none to an infinite criterion, and none to any where all are infinite", () => {
    const infinite = Number.POSITIVE_INFINITY;
    expect(akaikeWeights([3, infinite])).toEqual([1, 0]);
    expect(akaikeWeights([infinite, infinite])).toEqual([0, 0]);
  });
});

describe("birgeFactor", () => {
  it("is √(χ²/ν) where χ² is significantly above ν", () => {
    expect(birgeFactor(40, 10)).toBe(2);
  });

  it("is 1 where χ² may be chance, or is smaller than ν", () => {
    // The 1 % point of χ² on 10 degrees of freedom is 23.209 (standard tables).
    expect(birgeFactor(23.2, 10)).toBe(1);
    expect(birgeFactor(23.22, 10)).toBeCloseTo(Math.sqrt(2.322), 12);
    expect(birgeFactor(1, 10)).toBe(1);
    expect(birgeFactor(100, 0)).toBe(1);
  });
});
