import { describe, expect, it } from "vitest";
import { fitLine, predictLinear } from "../../src/numerics/linear-fit.ts";
import { mean, standardDeviation } from "../../src/numerics/moments.ts";
import { propagate, propagateByMonteCarlo, propagateTogether } from "../../src/numerics/propagate.ts";

// JCGM 100:2008 (the GUM), worked examples of annex H. Data and results as quoted, from the GUM, by the documentation
// and tests of GTC (GUM Tree Calculator, Measurement Standards Laboratory of New Zealand) and by the R packages
// `errors` and `propagate`; the further digits are GTC's and msl-nlf's own output.

describe("H.3: calibration of a thermometer by a straight line", () => {
  const t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.01, 26.511];
  const b = [-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.16];
  const fit = fitLine(
    t.map((value) => value - 20),
    b,
  );

  it("gives the intercept −0.1712(29) °C and the slope 0.00218(67)", () => {
    expect(fit.parameters[0]).toBeCloseTo(-0.1712, 4);
    expect(fit.standardErrors[0]).toBeCloseTo(0.0029, 4);
    expect(fit.parameters[1]).toBeCloseTo(0.00218, 5);
    expect(fit.standardErrors[1]).toBeCloseTo(0.00067, 5);
  });

  it("agrees with GTC's further digits", () => {
    expect(fit.parameters[0]).toBeCloseTo(-0.17120379013135, 13);
    expect(fit.parameters[1]).toBeCloseTo(0.0021826977398872894, 14);
    expect(fit.standardErrors[1]).toBeCloseTo(0.0006679387732278323, 15);
    expect(fit.chi2).toBeCloseTo(0.000110096583109, 15);
    expect(fit.degreesOfFreedom).toBe(9);
  });

  it("gives the correlation −0.930 of intercept and slope", () => {
    expect(fit.correlation[1]).toBeCloseTo(-0.93, 3);
  });

  it("predicts the correction at 30 °C, −0.1494(41) °C, with the covariance", () => {
    const { value, u } = predictLinear(fit, [1, 10]);
    expect(value).toBeCloseTo(-0.1494, 4);
    expect(u).toBeCloseTo(0.0041, 4);
    expect(value / -0.14937681268874).toBeCloseTo(1, 8);
    expect(u / 0.004138595752854).toBeCloseTo(1, 10);
  });

  it("predicts the same through the law of propagation with correlated inputs", () => {
    const inputs = fit.parameters.map((value, j) => ({ value, u: fit.standardErrors[j]! }));
    const { value, u } = propagate(([y1, y2]) => y1! + y2! * 10, inputs, fit.correlation);
    expect(value / -0.14937681268874).toBeCloseTo(1, 8);
    expect(u / 0.004138595752854).toBeCloseTo(1, 9);
  });

  it("does so by propagation of distributions too: −0.1494(41), 95 % within ±1.96 u", () => {
    const inputs = fit.parameters.map((value, j) => ({ value, u: fit.standardErrors[j]! }));
    const monteCarlo = propagateByMonteCarlo(([y1, y2]) => y1! + y2! * 10, inputs, {
      correlation: fit.correlation,
      seed: 1,
    });
    expect(monteCarlo.mean).toBeCloseTo(-0.1494, 4);
    expect(monteCarlo.u).toBeCloseTo(0.0041, 4);
    expect(monteCarlo.interval95[0]).toBeCloseTo(-0.14938 - 1.96 * 0.0041386, 3);
    expect(monteCarlo.interval95[1]).toBeCloseTo(-0.14938 + 1.96 * 0.0041386, 3);
  });

  it("takes a systematic error common to all points, 0.005 °C, into the intercept alone (H.3.6; GTC)", () => {
    const common = { value: 0, u: 0.005 };
    const fitted = (j: number) => ({ value: fit.parameters[j]!, u: fit.standardErrors[j]! });
    expect(propagate(([y1, e]) => y1! + e!, [fitted(0), common]).u).toBeCloseTo(0.00576893138292676, 11);
    expect(propagate(([y2]) => y2!, [fitted(1), common]).u).toBeCloseTo(0.0006679387732278323, 12);
  });
});

describe("H.2: resistance and reactance from correlated inputs", () => {
  const volt = [5.007, 4.994, 5.005, 4.99, 4.999];
  const ampere = [19.663, 19.639, 19.64, 19.685, 19.678].map((i) => i / 1000);
  const radian = [1.0456, 1.0438, 1.0468, 1.0428, 1.0433];
  const observed = [volt, ampere, radian];
  const inputs = observed.map((x) => ({ value: mean(x), u: standardDeviation(x) / Math.sqrt(5) }));
  const correlation = observed.flatMap((x) => observed.map((y) => correlationOf(x, y)));
  const functions = [
    ([v, i, phi]: readonly number[]) => (v! / i!) * Math.cos(phi!),
    ([v, i, phi]: readonly number[]) => (v! / i!) * Math.sin(phi!),
    ([v, i]: readonly number[]) => v! / i!,
  ];
  const { results, covariance } = propagateTogether(functions, inputs, correlation);
  const [resistance, reactance, impedance] = results;

  it("means and uncertainties: V = 4.9990(32) V, I = 19.6610(95) mA, φ = 1.04446(75) rad", () => {
    expect(inputs[0]!.value).toBeCloseTo(4.999, 4);
    expect(inputs[1]!.value).toBeCloseTo(0.019661, 6);
    expect(inputs[2]!.value).toBeCloseTo(1.04446, 5);
    expect(inputs[0]!.u).toBeCloseTo(0.0032093613071761, 15);
    expect(inputs[1]!.u).toBeCloseTo(9.471008394041335e-6, 17);
    expect(inputs[2]!.u).toBeCloseTo(0.0007520638270785, 15);
  });

  it("correlations: r(V, I) = −0.36, r(V, φ) = 0.86, r(I, φ) = −0.65", () => {
    expect(correlation[1]).toBeCloseTo(-0.36, 2);
    expect(correlation[2]).toBeCloseTo(0.86, 2);
    expect(correlation[5]).toBeCloseTo(-0.65, 2);
  });

  it("R = 127.732(71) Ω", () => {
    expect(resistance!.value).toBeCloseTo(127.732169928102, 10);
    expect(resistance!.u).toBeCloseTo(0.071071407396995, 8);
  });

  it("X = 219.847 Ω with u = 0.295 Ω (its printed digits are not the rounding of 0.2956)", () => {
    expect(reactance!.value).toBeCloseTo(219.847, 3);
    expect(Math.abs(reactance!.u - 0.295)).toBeLessThan(1e-3);
  });

  it("Z = 254.260(236) Ω", () => {
    expect(impedance!.value).toBeCloseTo(254.26, 3);
    expect(impedance!.u).toBeCloseTo(0.236, 3);
  });

  it("r(R, X) = −0.588, r(R, Z) = −0.485, r(X, Z) = 0.993", () => {
    const r = (a: number, b: number) => covariance[a * 3 + b]! / results[a]!.u / results[b]!.u;
    expect(r(0, 1)).toBeCloseTo(-0.588, 3);
    expect(r(0, 2)).toBeCloseTo(-0.485, 3);
    expect(r(1, 2)).toBeCloseTo(0.993, 3);
  });
});

function correlationOf(x: readonly number[], y: readonly number[]): number {
  const [mx, my] = [mean(x), mean(y)];
  const product = x.reduce((sum, value, k) => sum + (value - mx) * (y[k]! - my), 0);
  return product / (x.length - 1) / standardDeviation(x) / standardDeviation(y);
}
