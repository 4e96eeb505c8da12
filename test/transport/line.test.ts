import { inverse, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import { fitLine, meanDiffusion } from "../../src/transport/line.ts";
import type { Width } from "../../src/transport/width.ts";
import { perAxis, perAxisVariance } from "../../src/transport/width.ts";
import { digitsOf, readLinear } from "../reference/nist-strd.ts";

/** Widths of a turned, growing spot: cov(Σij, Σkl) = (Σik·Σjl + Σil·Σjk)/N, as N photons give (Wishart). */
function turnedWidths(seed: number): Width[] {
  const random = createRandom(seed);
  return Array.from({ length: 25 }, (_, frame) => {
    const time = 0.1 + 0.3 * frame ** 1.2;
    const [xx, xy, yy] = [0.12 + 2 * 0.05 * time, 0.02 + 2 * 0.02 * time, 0.1 + 2 * 0.03 * time];
    const n = 3000 * Math.exp(-time / 6);
    const covariance = Float64Array.of(
      2 * xx * xx,
      2 * xx * xy,
      2 * xy * xy,
      2 * xx * xy,
      xx * yy + xy * xy,
      2 * xy * yy,
      2 * xy * xy,
      2 * xy * yy,
      2 * yy * yy,
    ).map((c) => c / n);
    const noise = [0, 4, 8].map((at) => Math.sqrt(covariance[at]!) * random.normal());
    return { frame, time, variance: [xx + noise[0]!, xy + noise[1]!, yy + noise[2]!], covariance };
  });
}

/** The textbook formula θ = (XᵀV⁻¹X)⁻¹XᵀV⁻¹y with the whole of V as one dense matrix, by ml-matrix. */
function byDenseMatrices(widths: readonly Width[]) {
  const [frames, k] = [widths.length, widths[0]!.variance.length];
  const x = Matrix.zeros(frames * k, 2 * k);
  const v = Matrix.zeros(frames * k, frames * k);
  const y = Matrix.columnVector(widths.flatMap((w) => w.variance));
  widths.forEach(({ time, covariance }, i) => {
    for (let a = 0; a < k; a++) {
      x.set(i * k + a, a, 1);
      x.set(i * k + a, k + a, 2 * time);
      for (let b = 0; b < k; b++) v.set(i * k + a, i * k + b, covariance[a * k + b]!);
    }
  });
  const weighted = x.transpose().mmul(inverse(v));
  const covariance = inverse(weighted.mmul(x));
  const theta = covariance.mmul(weighted.mmul(y));
  const residual = Matrix.sub(y, x.mmul(theta));
  const chi2 = residual.transpose().mmul(inverse(v)).mmul(residual).get(0, 0);
  return { theta: theta.to1DArray(), covariance, chi2, degreesOfFreedom: frames * k - 2 * k };
}

describe("the line of spread", () => {
  it("is generalised least squares of all three components at once", () => {
    const widths = turnedWidths(1);
    const line = fitLine(widths)!;
    const dense = byDenseMatrices(widths);
    [...line.intercept, ...line.diffusion].forEach((value, j) => {
      expect(value / dense.theta[j]!).toBeCloseTo(1, 8);
    });
    line.covariance.forEach((value, at) => {
      const [i, j] = [Math.floor(at / 6), at % 6];
      const scale = Math.sqrt(dense.covariance.get(i, i) * dense.covariance.get(j, j));
      expect((value - dense.covariance.get(i, j)) / scale).toBeCloseTo(0, 8);
    });
    expect(line.chi2 / dense.chi2).toBeCloseTo(1, 8);
    expect(line.degreesOfFreedom).toBe(dense.degreesOfFreedom);
  });

  it("gives the certified line of NIST's Norris set, with its standard deviations", () => {
    // y = B0 + B1·x as a trace: Σ = y, t = x/2, so that Σ₀ = B0 and D = B1; unit weights
    const set = readLinear("Norris");
    const widths = set.y.map((y, frame) => ({
      frame,
      time: set.x[0]![frame]! / 2,
      variance: [y],
      covariance: Float64Array.of(1),
    }));
    const line = fitLine(widths)!;
    const found = [line.intercept[0]!, line.diffusion[0]!];
    const scale = Math.sqrt(line.chi2 / line.degreesOfFreedom);
    expect(digitsOf(scale, set.residualDeviation)).toBeGreaterThan(8);
    for (const j of [0, 1]) {
      expect(digitsOf(found[j]!, set.certified[j]!)).toBeGreaterThan(8);
      expect(
        digitsOf(scale * Math.sqrt(line.covariance[3 * j]!), set.certifiedDeviations[j]!),
      ).toBeGreaterThan(8);
    }
  });

  it("gives half the trace of D, with the variance that the components share", () => {
    const line = fitLine(turnedWidths(2))!;
    const { value, variance } = meanDiffusion(line);
    expect(value).toBeCloseTo((line.diffusion[0]! + line.diffusion[2]!) / 2, 14);
    const pulls = Array.from(
      { length: 400 },
      (_, seed) => meanDiffusion(fitLine(independent(seed))!).value - 0.04,
    );
    const spread = pulls.reduce((sum, p) => sum + p * p, 0) / 400;
    // 400 draws tell a variance to 7 %
    expect(Math.abs(spread / meanDiffusion(fitLine(independent(0))!).variance - 1)).toBeLessThan(0.28);
    expect(variance).toBeGreaterThan(0);
  });

  it("may slope downwards", () => {
    const widths = [0, 1, 2, 3].map((time, frame) => ({
      frame,
      time,
      variance: [1 - 0.2 * time],
      covariance: Float64Array.of(1e-4),
    }));
    expect(meanDiffusion(fitLine(widths)!).value).toBeCloseTo(-0.1, 12);
  });

  it("is none through one time, or through nothing", () => {
    const one = { frame: 0, time: 2, variance: [1], covariance: Float64Array.of(1) };
    expect(fitLine([one, { ...one, frame: 1 }])).toBeNull();
    expect(fitLine([])).toBeNull();
  });
});

/** Round widths whose components scatter independently, true D = 0.04. */
function independent(seed: number): Width[] {
  const random = createRandom(9000 + seed);
  return Array.from({ length: 12 }, (_, frame) => {
    const s = 0.1 + 0.08 * frame;
    const v = (2 * s * s) / 2000;
    const covariance = Float64Array.of(v, 0, 0, 0, v / 2, 0, 0, 0, v);
    const draw = (variance: number) => Math.sqrt(variance) * random.normal();
    return { frame, time: frame, variance: [s + draw(v), draw(v / 2), s + draw(v)], covariance };
  });
}

describe("the width per axis", () => {
  it("is half the trace of Σ on a map, Σxx on a trace", () => {
    expect(perAxis({ variance: [0.3, 0.1, 0.5] })).toBeCloseTo(0.4, 15);
    expect(perAxis({ variance: [0.3] })).toBe(0.3);
  });

  it("has the variance σ⁴/N of an isotropic spot of N photons", () => {
    // Var(Σxx) = Var(Σyy) = 2σ⁴/N, uncorrelated: Var of their mean is σ⁴/N
    const v = (2 * 0.2 ** 2) / 1000;
    const covariance = Float64Array.of(v, 0, 0, 0, v / 2, 0, 0, 0, v);
    const width = { frame: 0, time: 0, variance: [0.2, 0, 0.2], covariance };
    expect(perAxisVariance(width) / (0.2 ** 2 / 1000)).toBeCloseTo(1, 12);
  });
});
