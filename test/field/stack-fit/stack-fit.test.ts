import { describe, expect, it } from "vitest";
import { fitCandidates } from "../../../src/field/stack-fit/candidates.ts";
import { fitStack } from "../../../src/field/stack-fit/fit-stack.ts";
import { goodnessOf } from "../../../src/field/stack-fit/goodness.ts";
import type { Name, Values } from "../../../src/field/stack-fit/parameters.ts";
import { CANDIDATES, namesOf } from "../../../src/field/stack-fit/parameters.ts";
import { deviance, naturalSize, scoreStack } from "../../../src/field/stack-fit/score-stack.ts";
import type { StackData } from "../../../src/field/stack-fit/stack-data.ts";
import { trimPatch } from "../../../src/field/stack-fit/stack-data.ts";
import { drawnStacks } from "./drawn-stack.ts";

const ROUND = { start: "round", diffusion: "isotropic" } as const;

/** Stacks from the Fourier solver of `synth`, which shares no code with the solver under the fit. */
const stack = (life: string, photons: number, seed: number): StackData =>
  drawnStacks(life, photons).draw(seed);

const start = (photons: number): Values => ({
  amplitude: photons,
  x: 1.76,
  y: 1.71,
  s: 0.09,
  D: 0.02,
  tau: 5,
  background: 0.4,
});

const ANNIHILATION = 'annihilation = "0.6 /ns"';
const CAPTURE = 'capture = "0.15 /ns"\ntrap_light = 1\ntrap_lifetime = "20 ns"';

function pullsOf(names: readonly Name[], p: ArrayLike<number>, c: Float64Array, truth: Values): number[] {
  return names.map((name, i) => (p[i]! - truth[name]!) / Math.sqrt(c[i * names.length + i]!));
}

describe("scoreStack", () => {
  it("is the slope of −½·(−2 ln L) for counted photons, by central differences", () => {
    const data = stack(ANNIHILATION, 3e4, 1);
    const names = namesOf("map", CANDIDATES[3]!, ROUND);
    const v: Values = { ...start(3.1e4), s: 0.093, D: 0.022, k_n0: 0.4, capture: 0.05, trap_lifetime: 12 };
    const p = Float64Array.from(names, (name) => v[name]!);
    const { score, information } = scoreStack(data, names, p);
    for (const [i, name] of names.entries()) {
      const h = 1e-3 * naturalSize(name, v);
      const at = (by: number) => deviance(data, names, p.with(i, p[i]! + by));
      const slope = -(at(h) - at(-h)) / (4 * h);
      // in standard deviations of the score
      const size = Math.sqrt(information[i * names.length + i]!);
      expect(Math.abs(score[i]! - slope) / size).toBeLessThan(2e-3 * (1 + Math.abs(slope / size)));
    }
  });
});

describe("trimPatch", () => {
  it("loses no photon and keeps outliers where they are", () => {
    const patch = {
      rectangle: { x0: 2, y0: 3, width: 6, height: 5 },
      data: Float32Array.from({ length: 30 }, (_, i) => i),
      outerCount: 7,
      outerSum: 100,
      excluded: [9, 29],
    };
    const trimmed = trimPatch(patch, { x0: 4, y0: 4, width: 2, height: 2 });
    expect([...trimmed.data]).toEqual([8, 9, 14, 15]);
    expect(trimmed.excluded).toEqual([1]);
    // 30 pixels less 4 kept less one outlier outside, and their sum
    expect(trimmed.outerCount).toBe(7 + 25);
    expect(trimmed.outerSum).toBe(100 + 435 - (8 + 9 + 14 + 15) - 29);
  });
});

describe("fitStack", () => {
  it("finds annihilation, capture and plain diffusion within their uncertainties", () => {
    const cases = [
      { life: "", candidate: CANDIDATES[0]!, truth: {} },
      { life: ANNIHILATION, candidate: CANDIDATES[1]!, truth: { k_n0: 0.6 } },
      { life: CAPTURE, candidate: CANDIDATES[2]!, truth: { capture: 0.15, trap_lifetime: 20 } },
    ];
    for (const [k, { life, candidate, truth }] of cases.entries()) {
      const names = namesOf("map", candidate, ROUND);
      const data = stack(life, 1e5, 20 + k);
      const fit = fitStack(data, names, { ...start(1e5), k_n0: 0.2, capture: 0.05, trap_lifetime: 10 });
      expect(fit.converged).toBe(true);
      const pulls = pullsOf(names, fit.parameters, fit.covariance, { ...start(1e5), ...truth });
      for (const pull of pulls) expect(Math.abs(pull)).toBeLessThan(4);
      const { chi2, degreesOfFreedom } = goodnessOf(data, names, fit.parameters);
      expect(Math.abs(chi2 - degreesOfFreedom)).toBeLessThan(4.5 * Math.sqrt(2 * degreesOfFreedom));
    }
  });

  it("scatters as its covariance says: pulls over 24 seeded draws with annihilation", () => {
    const names = namesOf("map", CANDIDATES[1]!, ROUND);
    const sums = names.map(() => ({ one: 0, two: 0 }));
    const draws = 24;
    for (let k = 0; k < draws; k++) {
      const fit = fitStack(stack(ANNIHILATION, 2e4, 100 + k), names, { ...start(2e4), k_n0: 0.5 });
      const pulls = pullsOf(names, fit.parameters, fit.covariance, { ...start(2e4), k_n0: 0.6 });
      for (const [i, pull] of pulls.entries()) {
        sums[i]!.one += pull;
        sums[i]!.two += pull * pull;
      }
    }
    for (const { one, two } of sums) {
      expect(Math.abs(one / draws)).toBeLessThan(3.5 / Math.sqrt(draws));
      // χ² of 24 degrees of freedom lies between 7 and 53 in 99.95 %
      expect(two).toBeGreaterThan(7);
      expect(two).toBeLessThan(53);
    }
  });
});

describe("fitCandidates", () => {
  it("prefers what the stack was made with, and no candidate that the data do not determine", () => {
    const chosen = (life: string, seed: number) =>
      fitCandidates(stack(life, 5e4, seed), ROUND, start(5e4), null)!.preferred;
    expect(chosen("", 3).candidate.name).toBe("diffusion");
    expect(chosen(ANNIHILATION, 4).candidate.name).toBe("annihilation");
    const capture = chosen(CAPTURE, 5);
    expect(capture.candidate.name).toBe("capture");
    expect(capture.converged).toBe(true);
  });
});
