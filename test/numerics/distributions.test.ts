import { describe, expect, it } from "vitest";
import {
  chiSquareUpperTail,
  erf,
  gamma,
  lnGamma,
  normalCdf,
  normalQuantile,
  studentTQuantile,
} from "../../src/numerics/distributions.ts";

// The expected values of this file are SciPy 1.17.1's (scipy.stats, scipy.special), to the digits printed.

function expectRelative(value: number, expected: number, tolerance: number): void {
  expect(Math.abs(value - expected)).toBeLessThanOrEqual(tolerance * Math.abs(expected));
}

describe("chiSquareUpperTail", () => {
  it.each([
    [1, 1, 0.3173105078629112],
    [10, 3, 0.01856613546304325],
    [3.2, 9, 0.9558347256002608],
    [70, 40, 0.002324506607842079],
    [1100, 1000, 0.01461440812629519],
    [50500, 50000, 0.05728219205320396],
    [60, 2, 9.357622968840163e-14],
    [0.1, 10, 0.9999999975020487],
  ])("of χ² = %f on %i degrees of freedom", (chi2, dof, expected) => {
    expect(Math.abs(chiSquareUpperTail(chi2, dof) - expected)).toBeLessThan(1e-9 * expected + 1e-16);
  });

  it("is e^(−χ²/2) on 2 degrees of freedom (closed form)", () => {
    for (const chi2 of [0.1, 1, 5, 20])
      expectRelative(chiSquareUpperTail(chi2, 2), Math.exp(-chi2 / 2), 1e-11);
  });

  it("is 1 without freedom or without χ², and 0 for an infinite χ²", () => {
    expect(chiSquareUpperTail(5, 0)).toBe(1);
    expect(chiSquareUpperTail(0, 5)).toBe(1);
    expect(chiSquareUpperTail(Number.POSITIVE_INFINITY, 5)).toBe(0);
    expect(chiSquareUpperTail(1e6, 5)).toBe(0);
  });
});

describe("the normal distribution", () => {
  it.each([
    [-3, 0.001349898031630093],
    [-1, 0.1586552539314571],
    [0, 0.5],
    [0.5, 0.6914624612740131],
    [1.96, 0.9750021048517795],
    [5, 0.9999997133484281],
  ])("has Φ(%f) = %f", (x, expected) => {
    expectRelative(normalCdf(x), expected, 1e-13);
  });

  it.each([
    [1e-10, -6.361340902404056],
    [0.001, -3.090232306167813],
    [0.025, -1.959963984540054],
    [0.3, -0.5244005127080409],
    [0.975, 1.959963984540054],
    [0.9999, 3.719016485455709],
  ])("has the quantile of %f at %f", (p, expected) => {
    expectRelative(normalQuantile(p), expected, 1e-9);
  });
});

describe("studentTQuantile", () => {
  it.each([
    [0.975, 1, 12.70620473617469],
    [0.975, 2, 4.302652729749462],
    [0.975, 9, 2.262157162798205],
    [0.975, 30, 2.042272456301238],
    [0.975, 1000, 1.962339080826408],
    [0.6, 4, 0.2707222947075976],
    [0.995, 5, 4.032142983555228],
  ])("of %f on %i degrees of freedom", (p, dof, expected) => {
    expectRelative(studentTQuantile(p, dof), expected, 1e-7);
  });

  it("is the normal quantile on infinite freedom", () => {
    expect(studentTQuantile(0.975, Number.POSITIVE_INFINITY)).toBe(normalQuantile(0.975));
  });
});

describe("erf", () => {
  it.each([
    [0.01, 0.01128341555584962],
    [0.1, 0.1124629160182849],
    [0.5, 0.5204998778130465],
    [1, 0.8427007929497148],
    [2, 0.9953222650189527],
    [3.5, 0.9999992569016276],
    [-0.7, -0.6778011938374183],
  ])("of %f", (x, expected) => {
    expectRelative(erf(x), expected, 1e-13);
  });
});

describe("lnGamma and gamma", () => {
  it.each([
    [0.1, 2.252712651734206, 9.513507698668732],
    [0.5, 0.5723649429247, 1.772453850905516],
    [1.5, -0.1207822376352453, 0.8862269254527579],
    [3.3, 0.9870985778947343, 2.683437381955768],
    [10, 12.80182748008147, 362880],
    [100, 359.1342053695754, 9.332621544394417e155],
  ])("of %f", (x, ln, value) => {
    expectRelative(lnGamma(x), ln, 1e-12);
    expectRelative(gamma(x), value, 2e-10);
  });

  it("gives Γ(1/2) = √π (closed form)", () => {
    expectRelative(gamma(0.5), Math.sqrt(Math.PI), 1e-12);
  });
});
