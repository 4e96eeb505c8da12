import { describe, expect, it } from "vitest";
import { type Profile, profileInterval } from "../../../src/field/stack-fit/profile-interval.ts";

/** 95 % of χ² with one degree of freedom. */
const LEVEL = 3.841458820694124;

/** 5 counts: −2 ln L = 2(μ − 5 ln μ). */
const counts: Profile = {
  value: 5,
  u: Math.sqrt(5),
  lowest: 0,
  highest: Number.POSITIVE_INFINITY,
  scale: "value",
  rise: (x) => (x > 0 ? 2 * (x - 5 - 5 * Math.log(x / 5)) : null),
};

/** 8 times of a mean of 2: −2 ln L = 16(ln τ + 2/τ). */
const times: Profile = {
  value: 2,
  u: 2 / Math.sqrt(8),
  lowest: 0,
  highest: Number.POSITIVE_INFINITY,
  scale: "rate",
  rise: (x) => 16 * (Math.log(x / 2) + 2 / x - 1),
};

/** 20 times of a mean of 0.45, seen only up to 1: L = Π λe^(−λt)/(1 − e^(−λ)), λ = 1/τ. */
const cut = (tau: number): number => -40 * (-Math.log(tau) - 0.45 / tau - Math.log(-Math.expm1(-1 / tau)));
const cutShort: Profile = {
  value: 1.6566322064393335,
  u: 2.145176005903096,
  lowest: 0,
  highest: 1e4,
  scale: "rate",
  rise: (x) => cut(x) - cut(1.6566322064393335),
};

/** Ends to 2 % of a standard uncertainty. */
function expectInterval(
  [low, high]: readonly [number | null, number | null],
  u: number,
  ends: [number, number],
): void {
  expect(Math.abs((low ?? Number.NaN) - ends[0])).toBeLessThan(2e-2 * u);
  expect(Math.abs((high ?? Number.NaN) - ends[1])).toBeLessThan(2e-2 * u);
}

describe("profileInterval", () => {
  // the figures are roots by scipy.optimize.brentq of the likelihoods written beside the cases
  it("of a Poisson mean from 5 counts is 1.793 to 10.746", () => {
    expectInterval(profileInterval(counts, LEVEL), counts.u, [1.793005131730683, 10.746388633484804]);
  });

  it("of an exponential lifetime from 8 times is 1.074 to 4.377, on either scale", () => {
    const ends: [number, number] = [1.074435051751936, 4.376523070708664];
    expectInterval(profileInterval(times, LEVEL), times.u, ends);
    expectInterval(profileInterval({ ...times, scale: "value" }, LEVEL), times.u, ends);
  });

  it("of a normal mean of unknown spread is Student-shaped: ±√(e^(level/n) − 1) for n values of ML variance 1", () => {
    const n = 6;
    const rise = (x: number): number => n * Math.log1p(x * x);
    const half = 0.947070240068807;
    const profile: Profile = { ...counts, value: 0, u: 1 / Math.sqrt(n), lowest: -9, rise };
    expectInterval(profileInterval(profile, LEVEL), profile.u, [-half, half]);
  });

  it("has no upper end where a lifetime is seen for too short a window", () => {
    const [low, high] = profileInterval(cutShort, LEVEL);
    expect(Math.abs((low ?? Number.NaN) - 0.46000953740161493)).toBeLessThan(2e-2 * cutShort.u);
    expect(high).toBe(null);
  });

  it("has no lower end where the bound is reached first", () => {
    const rise = (x: number): number => (x - 0.3) ** 2 / 0.04;
    const profile: Profile = { ...counts, value: 0.3, u: 0.2, lowest: 0, rise };
    const [low, high] = profileInterval(profile, LEVEL);
    expect(low).toBe(null);
    expect(high).toBeCloseTo(0.3 + 0.2 * Math.sqrt(LEVEL), 3);
  });

  it("ends where no model follows any more", () => {
    const rise = (x: number): number | null => (x < 1.2 ? x ** 2 : null);
    const profile: Profile = { ...counts, value: 0, u: 1, lowest: -9, rise };
    const [low, high] = profileInterval(profile, LEVEL);
    expect(low).toBeCloseTo(-Math.sqrt(LEVEL), 3);
    expect(Math.abs((high ?? Number.NaN) - 1.2)).toBeLessThan(0.01);
  });

  it("widens with the scatter: four times the level is twice the half width of a parabola", () => {
    const rise = (x: number): number => x ** 2;
    const profile: Profile = { ...counts, value: 0, u: 1, lowest: -9, rise };
    expectInterval(profileInterval(profile, 4 * LEVEL), 1, [-2 * Math.sqrt(LEVEL), 2 * Math.sqrt(LEVEL)]);
  });
});
