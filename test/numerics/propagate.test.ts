import { describe, expect, it } from "vitest";
import { propagate, propagateByMonteCarlo } from "../../src/numerics/propagate.ts";

describe("propagate", () => {
  it("adds relative uncertainties of a product in squares (JCGM 100, 5.1.6)", () => {
    const { value, u, rows } = propagate(
      ([a, b]) => a! * b! * b!,
      [
        { value: 3, u: 0.03 },
        { value: 5, u: 0.1 },
      ],
    );
    expect(value).toBe(75);
    expect(u / 75).toBeCloseTo(Math.hypot(0.01, 2 * 0.02), 9);
    expect(rows[0]!.sensitivity).toBeCloseTo(25, 7);
    expect(rows[1]!.contribution).toBeCloseTo(30 * 0.1, 7);
  });

  it("lets a fully correlated error cancel in a ratio", () => {
    const inputs = [
      { value: 2, u: 0.1 },
      { value: 4, u: 0.2 },
    ];
    expect(propagate(([a, b]) => a! / b!, inputs, [1, 1, 1, 1]).u).toBeCloseTo(0, 6);
    expect(propagate(([a, b]) => a! / b!, inputs).u).toBeCloseTo(0.5 * Math.hypot(0.05, 0.05), 9);
  });

  it("takes sensitivities that are given", () => {
    expect(propagate(([a]) => a!, [{ value: 1, u: 0.5 }], undefined, [4]).u).toBe(2);
  });

  it("takes an input of exactly 0 without uncertainty", () => {
    const { u } = propagate(
      ([a, b]) => a! + b! ** 2,
      [
        { value: 1, u: 0.1 },
        { value: 0, u: 0 },
      ],
    );
    expect(u).toBeCloseTo(0.1, 9);
  });
});

describe("propagateByMonteCarlo", () => {
  it("gives the sum of four standard normals: u = 2, ±3.92 (JCGM 101:2008, 9.2.2)", () => {
    const inputs = Array.from({ length: 4 }, () => ({ value: 0, u: 1 }));
    const result = propagateByMonteCarlo((x) => x[0]! + x[1]! + x[2]! + x[3]!, inputs, { seed: 3 });
    // Four standard deviations of each estimate over 100,000 draws.
    expect(Math.abs(result.mean)).toBeLessThan(0.026);
    expect(Math.abs(result.u - 2)).toBeLessThan(0.018);
    expect(Math.abs(result.interval95[0] + 3.92)).toBeLessThan(0.07);
    expect(Math.abs(result.interval95[1] - 3.92)).toBeLessThan(0.07);
    expect(result.invalid).toBe(0);
  });

  it("gives the log-normal its skew: mean e^(σ²/2), 95 % from e^(−1.96σ) to e^(1.96σ) (closed form)", () => {
    const { mean, interval95 } = propagateByMonteCarlo(([x]) => Math.exp(x!), [{ value: 0, u: 0.5 }], {
      seed: 4,
    });
    expect(mean / Math.exp(0.125)).toBeCloseTo(1, 2);
    expect(Math.abs(Math.log(interval95[0]) / 0.5 + 1.95996)).toBeLessThan(0.04);
    expect(Math.abs(Math.log(interval95[1]) / 0.5 - 1.95996)).toBeLessThan(0.04);
  });

  it("draws correlated inputs, up to the same input twice", () => {
    const inputs = [
      { value: 1, u: 0.3 },
      { value: 1, u: 0.4 },
    ];
    const difference = (r: number) =>
      propagateByMonteCarlo(([a, b]) => a! - b!, inputs, { correlation: [1, r, r, 1], seed: 5 }).u;
    // Var(a − b) = 0.09 + 0.16 − 2·0.12·r.
    expect(difference(1)).toBeCloseTo(0.1, 2);
    expect(difference(-1)).toBeCloseTo(0.7, 2);
    expect(difference(0.5)).toBeCloseTo(Math.sqrt(0.13), 2);
  });

  it("repeats for a seed and counts draws without a value", () => {
    const draw = () =>
      propagateByMonteCarlo(([x]) => Math.sqrt(x!), [{ value: 2, u: 1 }], { seed: 6, draws: 10_000 });
    expect(draw()).toEqual(draw());
    // Φ(−2) = 2.275 % of the draws are negative.
    expect(Math.abs(draw().invalid / 10_000 - 0.02275)).toBeLessThan(0.006);
  });

  it("refuses an impossible correlation and a result that mostly has no value", () => {
    const inputs = Array.from({ length: 3 }, () => ({ value: 0, u: 1 }));
    const correlation = [1, 0.9, -0.9, 0.9, 1, 0.9, -0.9, 0.9, 1];
    expect(() => propagateByMonteCarlo((x) => x[0]!, inputs, { correlation, seed: 1 })).toThrow(RangeError);
    expect(() => propagateByMonteCarlo(() => Number.NaN, inputs, { seed: 1, draws: 100 })).toThrow(
      RangeError,
    );
  });
});
