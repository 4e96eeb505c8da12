import { describe, expect, test } from "vitest";
import { examine } from "../../src/outcome/analyse.ts";
import {
  type ClosureDraw,
  closurePlan,
  drawClosure,
  drawStack,
  summariseClosure,
} from "../../src/outcome/closure.ts";
import { recorded } from "./recordings.ts";

const examined = examine(recorded().stack);
const plan = closurePlan(examined, { seed: 3 });

function draw(value: number, u: number, isLimit = false): ClosureDraw {
  const interval95: [number, number] = isLimit ? [0, value] : [value - 2 * u, value + 2 * u];
  const each = { value, u, interval95, ...(isLimit ? { upper_limit: true } : {}) };
  return { diffusion_coefficient: each, lifetime: null, diffusion_length: null };
}

describe("the light of the fitted model", () => {
  test("in every frame sums to the decay's light and the background of all pixels", () => {
    // the sum of a well-sampled Gaussian over all pixels is its integral (Poisson's summation formula)
    const { analysis } = examined;
    const background = 0.3;
    for (const [k, { value }] of analysis.lightCurve.slice(0, 5).entries()) {
      const sum = plan.light[k]!.reduce((a, b) => a + b, 0);
      expect(sum / (value + background * 48 * 48)).toBeCloseTo(1, 2);
    }
  });

  test("spreads as the scenario's: σ² = 0.35² µm² + pixel² / 12 + 2Dt, per axis", () => {
    const frame = plan.light[20]!;
    const base = Math.min(...frame);
    let [sum, square] = [0, 0];
    for (const [i, value] of frame.entries()) {
      const x = (i % 48) * 0.1 - 2.37;
      sum += value - base;
      square += (value - base) * x * x;
    }
    // D = 0.2 cm²/s = 0.02 µm²/ns, 20 frames of 0.3 ns
    expect(square / sum / (0.35 ** 2 + 0.1 ** 2 / 12 + 2 * 0.02 * 6)).toBeCloseTo(1, 1);
  });
});

describe("a drawn stack", () => {
  test("is the same for the same seed and number, and another for another number", () => {
    const read = (index: number): Float64Array => {
      const into = new Float64Array(48 * 48);
      drawStack(plan, index).read(4, into);
      return into;
    };
    expect(read(7)).toEqual(read(7));
    expect(read(8)).not.toEqual(read(7));
  });

  test("carries Poisson noise about the model's light: χ² per pixel is 1", () => {
    const { offset, gain } = plan.acquisition.detector;
    const into = new Float64Array(48 * 48);
    let chi2 = 0;
    for (let index = 0; index < 20; index++) {
      drawStack(plan, index).read(0, into);
      for (const [i, light] of plan.light[0]!.entries()) {
        chi2 += ((into[i]! - offset) / gain - light) ** 2 / light;
      }
    }
    // 46 080 pixels: standard deviation of χ² per pixel ≤ √((2 + 1/0.3)/46080) = 0.011
    expect(Math.abs(chi2 / (20 * 48 * 48) - 1)).toBeLessThan(0.04);
  });

  test("is analysed with calibrations taken as exact", () => {
    expect(plan.acquisition.space.pixel.u).toBe(0);
    expect(plan.acquisition.time.relativeU).toBe(0);
  });

  test("gives D, τ and L within five standard uncertainties of the model's", () => {
    const found = drawClosure(plan, 0)!;
    for (const name of ["diffusion_coefficient", "lifetime", "diffusion_length"] as const) {
      expect(Math.abs(found[name]!.value - plan.truth[name]!)).toBeLessThan(5 * found[name]!.u);
    }
  });
});

describe("the summary", () => {
  const simple = { ...plan, truth: { diffusion_coefficient: 1, lifetime: null, diffusion_length: null } };

  test("gives mean, spread and counting error of the pulls, and the share of intervals that hold the truth", () => {
    // pulls 1, −1, 3 by hand: mean 1, standard deviation 2, error 2/√3; intervals ±2u hold in two of three
    const summary = summariseClosure(simple, [draw(1.1, 0.1), draw(0.9, 0.1), draw(1.3, 0.1)], 3);
    const d = summary.quantities.diffusion_coefficient!;
    expect(d.mean_pull).toBeCloseTo(1, 12);
    expect(d.spread).toBeCloseTo(2, 12);
    expect(d.u_mean_pull).toBeCloseTo(2 / Math.sqrt(3), 12);
    expect(d.bias).toBeCloseTo(0.1, 12);
    expect(d.coverage).toBeCloseTo(2 / 3, 12);
    expect(d.u_coverage).toBeCloseTo(Math.sqrt((0.95 * 0.05) / 3), 12);
  });

  test("counts an upper limit as holding where it is not below the truth, and gives it no pull", () => {
    const summary = summariseClosure(simple, [draw(1.2, 0.1, true), draw(0.8, 0.1, true)], 2);
    expect(summary.quantities.diffusion_coefficient).toMatchObject({
      coverage: 0.5,
      upper_limits: 2,
      mean_pull: null,
    });
  });

  test("counts stacks that were not analysed, and those not drawn after an interrupt", () => {
    expect(summariseClosure(simple, [draw(1, 0.1), null], 10)).toMatchObject({
      stacks: 2,
      asked: 10,
      failed: 1,
    });
  });
});

test("where the whole stack gives the headline, the stacks are drawn from its model: the recording's counts scatter about it as light does", () => {
  const { stack } = recorded(
    {
      recording: { frames: 20, width: 40, height: 40, photons: 2e5, background: 0.4 },
      motion: { diffusion_coefficient: "0.8 cm^2/s", centre_x: null, centre_y: null },
      life: { lifetime: "6 ns", capture: "0.3 /ns", trap_light: 0.9, trap_lifetime: "14 ns" },
      space: { pixel: "0.2 um" },
      time: { step: "0.6 ns" },
    },
    77,
  );
  const { analysis, meanLight } = examine(stack);
  expect(analysis.result.field?.adopted).toBe(true);
  const light = meanLight();
  const into = new Float64Array(40 * 40);
  const { offset, gain } = stack.acquisition.detector;
  let [pixels, totals] = [0, 0];
  for (const [i, frame] of light.entries()) {
    stack.read(i, into);
    let [excess, all] = [0, 0];
    for (const [k, mean] of frame.entries()) {
      const difference = (into[k]! - offset) / gain - mean;
      pixels += difference ** 2 / mean;
      excess += difference;
      all += mean;
    }
    totals += excess ** 2 / all;
  }
  // Poisson counts: χ² of 20 × 1600 pixels within 4 √(2/n) of 1 for each, and of the frames' totals 20 ± 4 √40 at most
  expect(Math.abs(pixels / (20 * 1600) - 1)).toBeLessThan(0.04);
  expect(totals).toBeLessThan(45);
});
