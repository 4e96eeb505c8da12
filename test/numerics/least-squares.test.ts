import { describe, expect, it } from "vitest";
import { fitLeastSquares, type LeastSquaresProblem } from "../../src/numerics/least-squares.ts";
import { WhitenedProblem } from "../../src/numerics/least-squares-problem.ts";
import { fitLine } from "../../src/numerics/linear-fit.ts";

const t = Array.from({ length: 12 }, (_, i) => i / 2);
const counts = [1012, 787, 640, 497, 413, 322, 275, 221, 180, 161, 139, 122];
const decay = (p: Float64Array) => t.map((x) => p[0]! * Math.exp(-x / p[1]!) + p[2]!);
const decayProblem: LeastSquaresProblem = { prediction: decay, y: counts, start: [500, 0.5, 1] };
const decayJacobian = (p: Float64Array) => {
  const e = t.map((x) => Math.exp(-x / p[1]!));
  return [e, e.map((v, i) => (p[0]! * v * t[i]!) / p[1]! ** 2), t.map(() => 1)];
};

function expectRelative(values: readonly number[], expected: readonly number[], tolerance: number): void {
  values.forEach((value, j) => {
    expect(Math.abs(value / expected[j]! - 1)).toBeLessThan(tolerance);
  });
}

describe("fitLeastSquares with known σ", () => {
  // scipy.optimize.curve_fit (SciPy 1.17.1) with absolute_sigma, covariance from the analytic Jacobian.
  const parameters = [944.6819739346688, 1.9556499205667917, 64.61061910887825];
  const deviations = [23.136702097290275, 0.12598017867758005, 16.209511273278867];

  it.each([
    ["central differences", undefined],
    ["an analytic Jacobian", decayJacobian],
  ])("gives SciPy's parameters, deviations, covariance and χ² with %s", (_, jacobian) => {
    const sigma = counts.map(Math.sqrt);
    const fit = fitLeastSquares({ ...decayProblem, sigma, ...(jacobian ? { jacobian } : {}) });
    expect(fit.converged).toBe(true);
    expectRelative(fit.parameters, parameters, 1e-8);
    expectRelative(fit.standardErrors, deviations, 1e-7);
    expectRelative([fit.covariance[1]!, fit.chi2], [-0.28358800001881057, 1.0574543617688712], 1e-7);
    expect(fit.degreesOfFreedom).toBe(9);
    expect(Array.from(fit.prediction)).toEqual(decay(Float64Array.from(fit.parameters)));
  });

  it("does not depend on the units of a parameter", () => {
    const tiny = fitLeastSquares({
      prediction: (p) => decay(Float64Array.of(p[0]! * 1e12, p[1]! * 1e-9, p[2]!)),
      y: counts,
      sigma: counts.map(Math.sqrt),
      start: [500e-12, 0.5e9, 1],
    });
    expectRelative(tiny.parameters, [parameters[0]! * 1e-12, parameters[1]! * 1e9, parameters[2]!], 1e-8);
    expectRelative(tiny.standardErrors, [deviations[0]! * 1e-12, deviations[1]! * 1e9, deviations[2]!], 1e-7);
  });

  it("agrees with the linear fit where the model is a straight line", () => {
    const sigma = t.map((_, i) => 1 + i / 10);
    const line = fitLine(t, counts, sigma);
    const fit = fitLeastSquares({
      prediction: (p) => t.map((x) => p[0]! + p[1]! * x),
      y: counts,
      sigma,
      start: [0, 0],
    });
    expectRelative(fit.parameters, line.parameters, 1e-9);
    expectRelative(Array.from(fit.covariance), Array.from(line.covariance), 1e-8);
  });
});

describe("fitLeastSquares with σ from the prediction", () => {
  it("gives the Poisson maximum likelihood and its inverse Fisher matrix (SciPy and NumPy, Fisher scoring)", () => {
    const fit = fitLeastSquares({
      ...decayProblem,
      sigma: (m) => m.map((v) => Math.sqrt(Math.max(v, 1e-9))),
    });
    expect(fit.converged).toBe(true);
    expectRelative(fit.parameters, [944.7514602334566, 1.9568491799809602, 64.52575835602867], 1e-6);
    expectRelative(fit.standardErrors, [23.134151279570926, 0.12591483634335143, 16.189139559434572], 1e-6);
  });

  it("gives a constant rate its plain mean, where weights 1/count would give the harmonic one", () => {
    const y = [3, 8, 5, 1, 12, 4];
    const fit = fitLeastSquares({
      prediction: (p) => y.map(() => p[0]!),
      y,
      sigma: (m) => m.map(Math.sqrt),
      start: [2],
    });
    expect(fit.parameters[0]).toBeCloseTo(5.5, 6);
    expect(fit.standardErrors[0]).toBeCloseTo(Math.sqrt(5.5 / 6), 6);
  });
});

describe("fitLeastSquares at bounds", () => {
  it("stays inside, holds the parameter that presses against its bound, and fits the others", () => {
    const fit = fitLeastSquares({
      ...decayProblem,
      sigma: counts.map(() => 1),
      lower: [0, 0, 80],
      upper: [1e9, 1e9, 1e9],
      start: [500, 0.5, 100],
    });
    expect(fit.parameters[2]).toBe(80);
    expect(fit.atBound).toEqual([2]);
    expect(fit.standardErrors[2]).toBe(0);
    expect(fit.converged).toBe(true);
    // The same with the background not a parameter at all.
    const fixed = fitLeastSquares({
      prediction: (p) => decay(Float64Array.of(p[0]!, p[1]!, 80)),
      y: counts,
      sigma: counts.map(() => 1),
      start: [500, 0.5],
    });
    expectRelative(fit.parameters.slice(0, 2), fixed.parameters, 1e-8);
    expectRelative(fit.standardErrors.slice(0, 2), fixed.standardErrors, 1e-7);
  });

  it("holds a parameter at its upper bound alike", () => {
    const fit = fitLeastSquares({ ...decayProblem, upper: [1e9, 1e9, 40] });
    const fixed = fitLeastSquares({
      prediction: (p) => decay(Float64Array.of(p[0]!, p[1]!, 40)),
      y: counts,
      start: [500, 0.5],
    });
    expect(fit.parameters[2]).toBe(40);
    expect(fit.atBound).toEqual([2]);
    expect(fit.converged).toBe(true);
    expectRelative(fit.parameters.slice(0, 2), fixed.parameters, 1e-8);
  });

  it.each([
    ["lower", { lower: [2] }],
    ["upper", { upper: [2] }],
  ])("takes derivatives from the inside of the %s bound: 12 for p³ at 2", (_, bounds) => {
    const problem = { prediction: (p: Float64Array) => [p[0]! ** 3, 0], y: [1, 0], start: [2], ...bounds };
    const task = new WhitenedProblem(problem, undefined);
    const [column] = task.jacobianAt(task.at(Float64Array.of(2)));
    expect(column![0]! / 12).toBeCloseTo(1, 9);
  });

  it("leaves a bound again where it started on it", () => {
    const fit = fitLeastSquares({ ...decayProblem, lower: [0, 0.5, 0], start: [500, 0.5, 0] });
    const free = fitLeastSquares(decayProblem);
    expect(fit.atBound).toEqual([]);
    expectRelative(fit.parameters, free.parameters, 1e-7);
  });

  it("never evaluates the model outside", () => {
    const seen: number[] = [];
    fitLeastSquares({
      prediction: (p) => {
        seen.push(p[1]!);
        return decay(p);
      },
      y: counts,
      start: [500, 3, 0],
      lower: [0, 1.97, -1e9],
      upper: [1e9, 3, 1e9],
    });
    expect(Math.min(...seen)).toBeGreaterThanOrEqual(1.97);
    expect(Math.max(...seen)).toBeLessThanOrEqual(3);
  });
});

describe("fitLeastSquares on data that cannot tell", () => {
  it("names parameters that only their sum determines, and gives them no finite deviation", () => {
    const sigma = counts.map(Math.sqrt);
    const fit = fitLeastSquares({
      prediction: (p) => t.map((x) => p[0]! + p[1]! + p[2]! * x),
      y: counts,
      sigma,
      start: [1, 1, 1],
    });
    expect(fit.undetermined).toEqual([0, 1]);
    expect(fit.standardErrors[0]).toBe(Number.POSITIVE_INFINITY);
    expect(fit.standardErrors[2]).toBeCloseTo(fitLine(t, counts, sigma).standardErrors[1]!, 6);
    expect(fit.converged).toBe(false);
    expect(fit.reason).toBe("the data do not determine every parameter");
  });

  it("has no deviation to offer for as many points as parameters without σ", () => {
    const fit = fitLeastSquares({
      prediction: (p) => [0, 1].map((x) => p[0]! + p[1]! * x),
      y: [1, 3],
      start: [0, 0],
    });
    expectRelative(fit.parameters, [1, 2], 1e-9);
    expect(fit.standardErrors).toEqual([Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY]);
  });

  it("meets exact data", () => {
    const fit = fitLeastSquares({ ...decayProblem, y: decay(Float64Array.of(1000, 2, 50)) });
    expectRelative(fit.parameters, [1000, 2, 50], 1e-10);
    expect(fit.converged).toBe(true);
  });

  it("says so where the model is not finite at the start", () => {
    const fit = fitLeastSquares({ ...decayProblem, start: [Number.NaN, 1, 1] });
    expect(fit.converged).toBe(false);
    expect(fit.reason).toBe("the model is not finite at the start");
    expect(fit.standardErrors.every((u) => u === Number.POSITIVE_INFINITY)).toBe(true);
  });

  it("steps back from where the model is not finite", () => {
    const fit = fitLeastSquares({
      prediction: (p) => t.map((x) => (p[1]! > 0 ? p[0]! * Math.exp(-x / p[1]!) + p[2]! : Number.NaN)),
      y: counts,
      start: [5000, 0.05, 0],
    });
    const free = fitLeastSquares(decayProblem);
    expectRelative(fit.parameters, free.parameters, 1e-7);
  });

  it("is never worse than its start, however few steps it may take", () => {
    for (const maxIterations of [1, 2, 3, 5]) {
      for (const start of [
        [1, 0.01, 0],
        [1e5, 40, -1e4],
        [900, 2, 60],
      ]) {
        const chi2 = decay(Float64Array.from(start)).reduce((sum, m, i) => sum + (counts[i]! - m) ** 2, 0);
        const fit = fitLeastSquares({ ...decayProblem, start, maxIterations });
        expect(fit.chi2).toBeLessThanOrEqual(chi2);
      }
    }
  });

  it("says where it ran out of steps", () => {
    const fit = fitLeastSquares({ ...decayProblem, start: [1, 40, 0], maxIterations: 2 });
    expect(fit.converged).toBe(false);
    expect(fit.reason).toBe("iteration limit reached");
  });
});

describe("fitLeastSquares on a call that does not fit together", () => {
  it.each([
    ["no parameters", { start: [] }],
    ["too few sigmas", { sigma: [1, 2] }],
    ["a sigma of 0", { sigma: counts.map(() => 0) }],
    ["too few bounds", { lower: [0] }],
    ["a point that is not finite", { y: counts.map(() => Number.NaN) }],
  ])("refuses %s", (_, change) => {
    expect(() => fitLeastSquares({ ...decayProblem, ...change })).toThrow(RangeError);
  });
});
