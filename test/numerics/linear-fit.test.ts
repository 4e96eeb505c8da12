import { describe, expect, it } from "vitest";
import { fitLine, fitLinear, predictLinear } from "../../src/numerics/linear-fit.ts";

describe("fitLine", () => {
  // Bevington and Robinson's closed forms for known, unequal σ: Δ = Σw Σwx² − (Σwx)².
  it("follows the weighted closed form, with known σ", () => {
    const x = [0, 1, 2, 3, 5, 8];
    const y = [1.1, 2.7, 5.2, 6.8, 11.1, 16.5];
    const sigma = [0.1, 0.2, 0.1, 0.4, 0.3, 0.5];
    const w = sigma.map((s) => 1 / s ** 2);
    const total = (f: (i: number) => number) => w.reduce((sum, wi, i) => sum + wi * f(i), 0);
    const [s, sx, sy] = [total(() => 1), total((i) => x[i]!), total((i) => y[i]!)];
    const [sxx, sxy] = [total((i) => x[i]! ** 2), total((i) => x[i]! * y[i]!)];
    const delta = s * sxx - sx * sx;
    const fit = fitLine(x, y, sigma);
    expect(fit.parameters[0]).toBeCloseTo((sxx * sy - sx * sxy) / delta, 12);
    expect(fit.parameters[1]).toBeCloseTo((s * sxy - sx * sy) / delta, 12);
    expect(fit.standardErrors[0]).toBeCloseTo(Math.sqrt(sxx / delta), 12);
    expect(fit.standardErrors[1]).toBeCloseTo(Math.sqrt(s / delta), 12);
    expect(fit.covariance[1]).toBeCloseTo(-sx / delta, 12);
    expect(fit.degreesOfFreedom).toBe(4);
  });

  it("has no uncertainty to offer for two points without σ", () => {
    const fit = fitLine([0, 1], [1, 3]);
    expect(fit.parameters[1]).toBeCloseTo(2, 12);
    expect(fit.standardErrors).toEqual([Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY]);
  });
});

describe("fitLinear", () => {
  it("takes the mean of two correlated readings with the weights of the closed form", () => {
    // Two readings with variances 1 and 4 and covariance 0.8: w₁ = (v₂ − c)/(v₁ + v₂ − 2c), variance (v₁v₂ − c²)/(…).
    const [v1, v2, c] = [1, 4, 0.8];
    const det = v1 * v2 - c * c;
    const precision = [Float64Array.from([v2 / det, -c / det, -c / det, v1 / det])];
    const fit = fitLinear({ design: [[1, 1]], y: [10, 13], precision });
    const w1 = (v2 - c) / (v1 + v2 - 2 * c);
    expect(fit.parameters[0]).toBeCloseTo(w1 * 10 + (1 - w1) * 13, 12);
    expect(fit.covariance[0]).toBeCloseTo(det / (v1 + v2 - 2 * c), 12);
    // χ² of two readings about their best mean: (y₁ − y₂)²/Var(y₁ − y₂).
    expect(fit.chi2).toBeCloseTo(9 / (v1 + v2 - 2 * c), 12);
  });

  it("takes independent groups as it takes σ", () => {
    const x = [0, 1, 2, 3];
    const y = [0.1, 0.9, 2.2, 2.9];
    const sigma = [0.1, 0.2, 0.3, 0.1];
    const design = [x.map(() => 1), x];
    const grouped = fitLinear({ design, y, precision: sigma.map((s) => Float64Array.of(1 / s ** 2)) });
    const plain = fitLine(x, y, sigma);
    grouped.parameters.forEach((p, j) => {
      expect(p).toBeCloseTo(plain.parameters[j]!, 12);
      expect(grouped.standardErrors[j]).toBeCloseTo(plain.standardErrors[j]!, 12);
    });
    expect(grouped.chi2).toBeCloseTo(plain.chi2, 10);
  });

  it("predicts with the covariance: u² at x is u²(a) + 2x·cov + x²u²(b)", () => {
    const fit = fitLine([1, 2, 3, 4], [1, 2.2, 2.9, 4.1], [0.1, 0.1, 0.1, 0.1]);
    // For a line with equal σ, u²(x) = σ²(1/n + (x − x̄)²/Σ(x − x̄)²).
    expect(predictLinear(fit, [1, 7]).u).toBeCloseTo(0.1 * Math.sqrt(1 / 4 + 4.5 ** 2 / 5), 12);
  });

  it("refuses columns that depend on each other, too few points, and groups that do not fit", () => {
    expect(() => fitLine([2, 2, 2], [1, 2, 3])).toThrow(RangeError);
    expect(() => fitLine([1], [1])).toThrow(RangeError);
    const precision = [Float64Array.of(1)];
    expect(() => fitLinear({ design: [[1, 1]], y: [1, 2], precision })).toThrow(RangeError);
  });
});
