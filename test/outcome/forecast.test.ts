import { describe, expect, test } from "vitest";
import { readScenario, type Scenario } from "../../src/field/scenario.ts";
import { drawFrames, expectation } from "../../src/field/synthesise.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { analyse } from "../../src/outcome/analyse.ts";
import { forecast } from "../../src/outcome/forecast.ts";
import { planFromResult } from "../../src/outcome/plan.ts";
import { type WidthsPrecision, widthsPrecision } from "../../src/outcome/precision.ts";
import { stackPrecision } from "../../src/outcome/stack-precision.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";

interface Plan {
  readonly photons?: number;
  readonly background?: number;
  readonly d?: number;
  readonly lifetime?: number;
  readonly sigma0?: number;
  readonly frames?: number;
  readonly step?: number;
  readonly size?: number;
  readonly height?: boolean;
  readonly more?: string;
}

function plan({
  photons = 2e4,
  background = 0.2,
  d = 0.05,
  lifetime = 5,
  sigma0 = 0.5,
  frames = 20,
  step = 0.5,
  size = 40,
  height = true,
  more = "",
}: Plan = {}): Scenario {
  return readScenario(
    `
[recording]
frames = ${frames}
width = ${size}
${height ? `height = ${size}` : ""}
photons = ${photons}
background = ${background}
[space]
pixel = "0.15 um"
[time]
first = "0 ns"
step = "${step} ns"
[motion]
diffusion_coefficient = "${d * 10} cm^2/s"
sigma0 = "${sigma0} um"
[life]
lifetime = "${lifetime} ns"
${more}
`,
    "plan",
  );
}

function spreadOf(values: readonly number[]): number {
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
}

function widths(scenario: Scenario): WidthsPrecision {
  const bound = widthsPrecision(scenario, expectation(scenario));
  if (bound === null) throw new Error("no bound");
  return bound;
}

/** Photons in all frames of a plan, its border left aside. */
function allPhotons(scenario: Scenario): number {
  return expectation(scenario).truth.frames.reduce((sum, frame) => sum + frame.photons, 0);
}

describe("a forecast", () => {
  test("is the spread that 60 analysed stacks show, within its counting error", () => {
    const scenario = plan();
    const mean = expectation(scenario);
    const found = Array.from({ length: 60 }, (_, k) => {
      const frames = drawFrames(scenario, mean, createRandom(700 + k));
      const { height, width, acquisition } = scenario;
      return analyse(memoryStack({ frames, height, width, acquisition })).result.quantities;
    });
    const { quantities } = forecast(scenario);
    const ratios = [
      spreadOf(found.map((q) => q.diffusion_coefficient.value)) / quantities.diffusion_coefficient.u,
      spreadOf(found.map((q) => q.lifetime?.value ?? Number.NaN)) / quantities.lifetime.u,
      spreadOf(found.map((q) => q.diffusion_length?.value ?? Number.NaN)) / quantities.diffusion_length.u,
    ];
    // a standard deviation from n normal draws has the relative error 1/√(2(n − 1)); three of them are allowed
    for (const ratio of ratios) expect(Math.abs(ratio - 1)).toBeLessThan(3 / Math.sqrt(2 * 59));
  });

  /**
   * Var(D) = ¼ [Σ w_i (t_i − t̄)²]⁻¹ with w_i = N_i/σ_i⁴: variance σ_i⁴/N_i of the width per axis of N_i isolated
   * photons of a round spot (each axis 2σ⁴/N, the Gaussian's Fisher information; textbook) through a weighted line.
   */
  test("of an isolated spot without background is the closed form of the weighted line", () => {
    const scenario = plan({ background: 0, photons: 1e5, size: 80, sigma0: 0.6 });
    const { truth } = expectation(scenario);
    const points = truth.frames.map((frame) => ({
      t: frame.delay_ns,
      w: frame.photons / (frame.variance_um2 + 0.15 ** 2 / 12) ** 2,
    }));
    const weight = points.reduce((sum, { w }) => sum + w, 0);
    const middle = points.reduce((sum, { t, w }) => sum + w * t, 0) / weight;
    const u = 0.5 / Math.sqrt(points.reduce((sum, { t, w }) => sum + w * (t - middle) ** 2, 0));
    expect(widths(scenario).diffusion.u / u).toBeCloseTo(1, 2);
  });

  /** δτ/τ = 1/√N for N photons of one exponential, all of it seen (textbook: variance of an exponential's mean). */
  test("of the lifetime is τ/√N where the decay is seen to its end", () => {
    const scenario = plan({
      background: 0,
      photons: 1e5,
      d: 0.001,
      lifetime: 1,
      frames: 80,
      step: 0.1,
      size: 40,
    });
    const { lifetime } = widths(scenario);
    expect((lifetime.u / lifetime.value) * Math.sqrt(allPhotons(scenario))).toBeCloseTo(1, 1);
  });

  /**
   * √N·δD/D of N photons with free Σ₀, by q = Dτ/σ₀²: 7.4 at q = 0.1, 3.7 at 0.3, 2.2 at 1: the exact bound from
   * single photons (x, y, t), found by numerical integration beforehand, to two digits.
   */
  test.each([
    [0.1, 7.4],
    [0.3, 3.7],
    [1, 2.2],
  ])("for q = Dτ/σ₀² = %d needs √N·δD/D = %d", (q, needed) => {
    const sigma0 = 0.8;
    const scenario = plan({
      background: 0,
      photons: 1e5,
      sigma0,
      d: (q * sigma0 ** 2) / 2,
      lifetime: 2,
      frames: 120,
      step: 0.1,
      size: 100,
    });
    const { value, u } = widths(scenario).diffusion;
    expect(Math.abs(((u / value) * Math.sqrt(allPhotons(scenario))) / needed - 1)).toBeLessThan(0.05);
  });

  test("falls as 1/√N without background, so that four times the light halves the error of D", () => {
    const scenario = plan({ background: 0 });
    const brighter = forecast({ ...scenario, photons: 9 * scenario.photons });
    const told = forecast(scenario);
    const { diffusion_coefficient: d } = told.quantities;
    expect(d.u / brighter.quantities.diffusion_coefficient.u).toBeCloseTo(3, 2);
    // to the 1 % at which the search ends
    expect(Math.abs((told.halving.light.factor ?? 0) / 4 - 1)).toBeLessThan(0.015);
  });

  test("names longer delays where the frames end long before the light does, and keeps its word", () => {
    const scenario = plan({ frames: 10, step: 0.1, lifetime: 5 });
    const { halving, quantities } = forecast(scenario);
    const factor = halving.window.factor ?? 0;
    // σ_D ∝ 1/T while T ≪ τ: somewhat more than twice the delays, as the spot grows and fades meanwhile
    expect(factor).toBeGreaterThan(2);
    expect(factor).toBeLessThan(3);
    const longer = forecast(plan({ frames: 10, step: 0.1 * factor, lifetime: 5 }));
    const ratio = longer.quantities.diffusion_coefficient.u / quantities.diffusion_coefficient.u;
    expect(Math.abs(2 * ratio - 1)).toBeLessThan(0.02);
  });

  test("names a smaller spot where the spot is wide, and keeps its word", () => {
    const wide = { d: 0.005, sigma0: 0.9, size: 60, background: 0.01 };
    const { halving, quantities } = forecast(plan(wide));
    const factor = halving.spot.factor ?? 0;
    // σ_D ∝ σ² while Dτ ≪ σ₀²: 1/√2
    expect(Math.abs(factor / Math.SQRT1_2 - 1)).toBeLessThan(0.08);
    const smaller = forecast(plan({ ...wide, sigma0: 0.9 * factor }));
    const ratio = smaller.quantities.diffusion_coefficient.u / quantities.diffusion_coefficient.u;
    expect(Math.abs(2 * ratio - 1)).toBeLessThan(0.02);
  });

  test("says that longer delays do not help where the light is gone before", () => {
    expect(forecast(plan({ lifetime: 1, step: 0.4 })).halving.window).toEqual({
      factor: null,
      best: { factor: 1, error_ratio: 1 },
    });
  });

  /** κ = 2 on one axis against 1 on a map (Gaussian's Fisher information; textbook). */
  test("of a trace without a slit is √2 times that of a map with the same photons", () => {
    const wide = { background: 0, photons: 1e5, size: 110 };
    const ratio = widths(plan({ ...wide, height: false })).diffusion.u / widths(plan(wide)).diffusion.u;
    expect(ratio / Math.SQRT2).toBeCloseTo(1, 2);
  });
});

describe("a forecast with annihilation or traps", () => {
  test("rests on an information that agrees with the widths' on a plain plan, and knows a little more", () => {
    const scenario = plan();
    const [line, field] = [widths(scenario), stackPrecision(scenario)];
    // one centre, background and roundness for all frames against one of each a frame: better, by less than a tenth
    for (const key of ["diffusion", "lifetime", "length"] as const) {
      const ratio = (field?.[key].u ?? 0) / line[key].u;
      expect(ratio).toBeLessThan(1);
      expect(ratio).toBeGreaterThan(0.9);
    }
  });

  test("names their rates too, by the whole-stack fit", () => {
    const { road, quantities } = forecast(plan({ more: 'annihilation = "0.2 /ns"' }));
    expect(road).toBe("whole_stack");
    expect(quantities.k_n0?.value).toBeCloseTo(0.2, 10);
    expect(quantities.capture).toBeNull();
    const caught = forecast(plan({ more: 'capture = "0.1 /ns"\ntrap_lifetime = "12 ns"' })).quantities;
    expect([caught.capture?.value, caught.trap_lifetime?.value]).toEqual([0.1, 12]);
  });

  test("costs D precision against the same light without them", () => {
    const plain = forecast(plan()).quantities.diffusion_coefficient;
    const meeting = forecast(plan({ more: 'annihilation = "0.2 /ns"' })).quantities.diffusion_coefficient;
    expect(meeting.u).toBeGreaterThan(plain.u);
  });

  test("follows L by where free excitons end: c shortens √(Dτ) to √(D/(1/τ + c))", () => {
    const { diffusion_length } = forecast(
      plan({ more: 'capture = "0.1 /ns"\ntrap_lifetime = "12 ns"' }),
    ).quantities;
    expect(diffusion_length.value).toBeCloseTo(Math.sqrt(0.05 / (1 / 5 + 0.1)), 4);
  });
});

describe("a plan from a pilot recording", () => {
  test("forecasts the error bars that the pilot's own counting gave", () => {
    const scenario = plan({ photons: 5e4 });
    const { height, width, acquisition } = scenario;
    const frames = drawFrames(scenario, expectation(scenario), createRandom(8));
    const { result } = analyse(memoryStack({ frames, height, width, acquisition }));
    const again = planFromResult(JSON.stringify(result), "result.json", {});
    const { diffusion_coefficient: d, lifetime } = forecast(again).quantities;
    expect(Math.abs(d.u / result.quantities.diffusion_coefficient.u_statistical - 1)).toBeLessThan(0.05);
    expect(Math.abs(lifetime.u / (result.quantities.lifetime?.u_statistical ?? 0) - 1)).toBeLessThan(0.05);
  });
});
