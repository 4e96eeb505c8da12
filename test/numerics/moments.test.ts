import { describe, expect, it } from "vitest";
import { mean, standardDeviation, weightedMean } from "../../src/numerics/moments.ts";

describe("standardDeviation", () => {
  it("of 2, 4, 4, 4, 5, 5, 7, 9 about their mean 5 is √(32/7)", () => {
    const values = [2, 4, 4, 4, 5, 5, 7, 9];
    expect(mean(values)).toBe(5);
    expect(standardDeviation(values)).toBeCloseTo(Math.sqrt(32 / 7), 14);
  });

  it("of a single value is 0", () => {
    expect(standardDeviation([3])).toBe(0);
  });
});

describe("weightedMean", () => {
  // Nine laboratories (Kacker, Metrologia 41 (2004) 132), inverse-variance mean computed with R's metafor, as quoted
  // in statsmodels' test results (results_meta.py); Q is the χ².
  it("gives the fixed-effect mean, standard error and Q of nine laboratories", () => {
    const y = [61.0, 61.4, 62.21, 62.3, 62.34, 62.6, 62.7, 62.84, 65.9];
    const v = [0.2025, 1.21, 0.09, 0.2025, 0.3844, 0.5625, 0.0676, 0.0225, 1.8225];
    const result = weightedMean(y, v.map(Math.sqrt));
    expect(result.mean).toBeCloseTo(62.5833970939982, 12);
    expect(result.u).toBeCloseTo(0.107845705498231, 13);
    expect(result.chi2).toBeCloseTo(24.801897741835, 9);
  });
});
