import { describe, expect, it } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import type { TransportLaw } from "../../src/transport/laws.ts";
import { fitLaws, preferLaw } from "../../src/transport/laws.ts";
import type { Width } from "../../src/transport/width.ts";

/** Widths per axis along a curve, µm², with the error σ²·√(2/N) of N photons dying with 5 ns; `noise` scales the draws. */
function widthsAlong(
  curve: (t: number) => number,
  { photons = 1e5, noise = 0, seed = 1, frames = 40, step = 0.25 } = {},
): Width[] {
  const random = createRandom(seed);
  return Array.from({ length: frames }, (_, frame) => {
    const time = step / 2 + step * frame;
    const variance = (2 * curve(time) ** 2) / (photons * Math.exp(-time / 5));
    const value = curve(time) + noise * Math.sqrt(variance) * random.normal();
    return { frame, time, variance: [value], covariance: Float64Array.of(variance) };
  });
}

const curves: Record<TransportLaw, { curve: (t: number) => number; truth: number[] }> = {
  line: { curve: (t) => 0.2 + 2 * 0.05 * t, truth: [0.2, 0.05] },
  power_law: { curve: (t) => 0.2 + 2 * 0.08 * t ** 0.6, truth: [0.2, 0.08, 0.6] },
  arrest: { curve: (t) => 0.2 + 2 * 0.08 * 2.5 * (1 - Math.exp(-t / 2.5)), truth: [0.2, 0.08, 2.5] },
  broken_line: {
    curve: (t) => 0.2 + (t < 3 ? 2 * 0.08 * t : 2 * 0.08 * 3 + 2 * 0.01 * (t - 3)),
    truth: [0.2, 0.08, 0.01, 3],
  },
};
const names = Object.keys(curves) as TransportLaw[];

describe("the laws of spread", () => {
  it.each(names)("%s gives back its own parameters from an exact curve", (name) => {
    const { curve, truth } = curves[name];
    const fit = fitLaws(widthsAlong(curve))[name]!;
    expect(fit.converged).toBe(true);
    expect(fit.chi2).toBeLessThan(1e-6);
    for (const [j, value] of truth.entries()) expect(fit.parameters[j]! / value).toBeCloseTo(1, 4);
    for (const t of [0.3, 2, 7]) expect(fit.value(t)).toBeCloseTo(curve(t), 5);
  });

  it("superdiffusion: an exponent above one comes back too", () => {
    const fit = fitLaws(widthsAlong((t) => 0.2 + 0.02 * t ** 1.8)).power_law!;
    expect(fit.parameters[2]!).toBeCloseTo(1.8, 4);
  });

  it("a falling width gives a negative D", () => {
    expect(fitLaws(widthsAlong((t) => 0.8 - 0.04 * t)).line!.parameters[1]!).toBeCloseTo(-0.02, 8);
  });

  it.each(names)("%s has the gradient of its value, by central differences", (name) => {
    const fit = fitLaws(widthsAlong(curves[name].curve, { noise: 1, seed: 5 }))[name]!;
    const formula = evaluateFormula(name);
    for (const t of [0.4, 2.2, 6]) {
      expect(fit.value(t)).toBeCloseTo(formula(fit.parameters, t), 10);
      fit.gradient(t).forEach((slope, j) => {
        const h = 1e-6 * Math.max(Math.abs(fit.parameters[j]!), 1e-3);
        const at = (by: number) =>
          formula(
            fit.parameters.map((p, k) => (k === j ? p + by : p)),
            t,
          );
        expect(Math.abs(slope - (at(h) - at(-h)) / (2 * h))).toBeLessThan(1e-5 * (1 + Math.abs(slope)));
      });
    }
  });

  it("scatter as their covariance says", () => {
    for (const name of ["line", "arrest"] as const) {
      const { curve, truth } = curves[name];
      const pulls = Array.from({ length: 150 }, (_, seed) => {
        const fit = fitLaws(widthsAlong(curve, { noise: 1, seed: 700 + seed }))[name]!;
        return (fit.parameters[1]! - truth[1]!) / Math.sqrt(fit.covariance[truth.length + 1]!);
      });
      const variance = pulls.reduce((sum, p) => sum + p * p, 0) / 150;
      expect(Math.abs(variance - 1)).toBeLessThan(0.46);
    }
  });

  it("need two frames more than parameters", () => {
    const fits = (frames: number) => fitLaws(widthsAlong(curves.line.curve, { frames }));
    expect(names.map((name) => fits(3)[name])).toEqual([null, null, null, null]);
    expect(preferLaw(fits(3))).toBe("line");
    expect(fits(4).line).not.toBeNull();
    expect(fits(4).power_law).toBeNull();
  });
});

/** The printed formulas once more. */
function evaluateFormula(name: TransportLaw): (p: readonly number[], t: number) => number {
  if (name === "line") return ([s, d], t) => s! + 2 * d! * t;
  if (name === "power_law") return ([s, g, a], t) => s! + 2 * g! * t ** a!;
  if (name === "arrest") return ([s, d, ta], t) => s! + 2 * d! * ta! * (1 - Math.exp(-t / ta!));
  return ([s, d, late, b], t) => s! + (t < b! ? 2 * d! * t : 2 * d! * b! + 2 * late! * (t - b!));
}

describe("the law to report", () => {
  it("is the line in at least 98 % of plain recordings", () => {
    let lines = 0;
    for (let seed = 1000; seed < 1300; seed++) {
      if (preferLaw(fitLaws(widthsAlong(curves.line.curve, { photons: 2e4, noise: 1, seed }))) === "line")
        lines++;
    }
    expect(lines).toBeGreaterThanOrEqual(294);
  });

  it("is the line where nothing moves at all", () => {
    let lines = 0;
    for (let seed = 1300; seed < 1360; seed++) {
      if (preferLaw(fitLaws(widthsAlong(() => 0.2, { photons: 2e4, noise: 1, seed }))) === "line") lines++;
    }
    expect(lines).toBeGreaterThanOrEqual(58);
  });

  it.each(["power_law", "arrest", "broken_line"] as const)("is not the line where a %s is clear", (name) => {
    for (let seed = 1; seed <= 5; seed++) {
      const fits = fitLaws(widthsAlong(curves[name].curve, { photons: 1e6, noise: 1, seed }));
      expect(preferLaw(fits)).not.toBe("line");
    }
  });

  it.each(["arrest", "broken_line"] as const)("is %s itself where the light is plenty", (name) => {
    const fits = fitLaws(widthsAlong(curves[name].curve, { photons: 3e7, noise: 1, seed: 3 }));
    expect(preferLaw(fits)).toBe(name);
  });
});
