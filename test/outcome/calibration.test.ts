import { describe, expect, it } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import { pictureOf } from "../frame/pictures.ts";
import { pull, recorded, resultOf } from "./recordings.ts";

describe("calibrations", () => {
  const plain = resultOf(recorded().stack).quantities;

  it("a pixel known to 1 % makes 2 % of D and of μ, 1 % of L, nothing of τ", () => {
    const {
      diffusion_coefficient: d,
      diffusion_length: length,
      lifetime,
      mobility,
    } = resultOf(recorded({ space: { pixel: "0.1 um ± 1 %" } }).stack).quantities;
    expect(d.u_systematic / d.value).toBeCloseTo(0.02, 6);
    expect(mobility!.u_systematic / mobility!.value).toBeCloseTo(0.02, 6);
    expect(length!.u_systematic / length!.value).toBeCloseTo(0.01, 6);
    expect(lifetime!.u_systematic).toBeCloseTo(0, 12);
    expect(d.u).toBeCloseTo(Math.hypot(d.u_statistical, d.u_systematic), 10);
    expect(d.u_statistical).toBeCloseTo(plain.diffusion_coefficient.u, 10);
  });

  it("a time base known to 3 % makes 3 % of D and τ, and cancels in L", () => {
    const stack = recorded({}, 1, (a) => ({ ...a, time: { ...a.time, relativeU: 0.03 } })).stack;
    const { diffusion_coefficient: d, diffusion_length: length, lifetime } = resultOf(stack).quantities;
    expect(d.u_systematic / d.value).toBeCloseTo(0.03, 4);
    expect(lifetime!.u_systematic / lifetime!.value).toBeCloseTo(0.03, 6);
    expect(length!.u_systematic).toBeCloseTo(0, 12);
  });

  it("a temperature of 295 K ± 2 K adds 0.68 % to μ alone, and none gives no μ", () => {
    const warm = resultOf(recorded({ sample: { temperature: "295 K ± 2 K" } }).stack);
    const { mobility, diffusion_coefficient: d } = warm.quantities;
    expect(mobility!.u_systematic / mobility!.value).toBeCloseTo(2 / 295, 5);
    expect(d.u_systematic).toBe(0);
    expect(resultOf(recorded({ sample: { temperature: null } }).stack).quantities.mobility).toBeNull();
  });

  it("has budget rows whose squares add up to u²", () => {
    const { budget, quantities } = resultOf(
      recorded({ space: { pixel: "0.1 um ± 1 %" }, sample: { temperature: "295 K ± 2 K" } }).stack,
    );
    for (const quantity of ["diffusion_coefficient", "mobility"] as const) {
      const rows = budget.filter((row) => row.quantity === quantity);
      expect(Math.hypot(...rows.map((row) => row.contribution))).toBeCloseTo(quantities[quantity]!.u, 8);
      for (const row of rows) expect(Math.abs(row.sensitivity) * row.u).toBeCloseTo(row.contribution, 10);
    }
  });
});

describe("the tensor", () => {
  const { stack } = recorded({
    recording: { photons: 2e5 },
    motion: { diffusion_coefficient: null, major: "0.3 cm^2/s", minor: "0.1 cm^2/s", angle: "30 deg" },
  });
  const result = resultOf(stack);
  const tensor = result.tensor!;

  it("has the principal values and the angle that the recording was made with", () => {
    expect(Math.abs(pull(tensor.major, 0.3))).toBeLessThan(4);
    expect(Math.abs(pull(tensor.minor, 0.1))).toBeLessThan(4);
    expect(Math.abs(pull(tensor.angle_deg, 30))).toBeLessThan(4);
    expect(tensor.angle_deg.u).toBeLessThan(2);
    // major·cos² + minor·sin², and (major − minor)·sin·cos
    expect(Math.abs(pull(tensor.xx, 0.25))).toBeLessThan(4);
    expect(Math.abs(pull(tensor.xy, 0.2 * Math.sin(Math.PI / 6) * Math.cos(Math.PI / 6)))).toBeLessThan(4);
  });

  it("has half its trace as the diffusion coefficient", () => {
    expect((tensor.xx.value + tensor.yy.value) / 2).toBeCloseTo(
      result.quantities.diffusion_coefficient.value,
      8,
    );
    expect(tensor.major.value + tensor.minor.value).toBeCloseTo(tensor.xx.value + tensor.yy.value, 10);
  });
});

describe("light that goes with the square of the density", () => {
  // n(r, t): σ_n² = 0.16 + 2·0.03·t, n ∝ e^(−t/8); its light ∝ ∫n² dA: variance σ_n²/2, amount e^(−2t/8)/σ_n²
  const [d, tau, sigma0] = [0.03, 8, 0.16];
  const { stack } = recorded({ time: { step: "0.4 ns" } }, 1, (a) => ({
    ...a,
    sample: { ...a.sample, emissionOrder: 2 },
  }));
  const { width, height, acquisition } = stack;
  const random = createRandom(31);
  const frames = acquisition.time.delays.map((t) => {
    const variance = sigma0 + 2 * d * t;
    const photons = 4e4 * Math.exp((-2 * t) / tau) * (sigma0 / variance);
    const v = variance / 2 / 0.01;
    return pictureOf(Float64Array.of(photons, 23.3, 23.7, v, 0, v, 0.3), width, height).map((mean) =>
      random.poisson(mean),
    );
  });
  const { quantities, decay } = resultOf(memoryStack({ frames, width, height, acquisition }));

  it("gives D of the density, twice that of the light", () => {
    expect(Math.abs(pull(quantities.diffusion_coefficient, 10 * d))).toBeLessThan(4);
    expect(quantities.diffusion_coefficient.u / quantities.diffusion_coefficient.value).toBeLessThan(0.03);
  });

  it("gives τ of the density, twice that of the light, with the thinning of the spot taken out", () => {
    expect(Math.abs(pull(quantities.lifetime!, tau))).toBeLessThan(4);
    expect(quantities.lifetime!.u / tau).toBeLessThan(0.03);
    expect(decay!.preferred).toBe("exponential");
  });

  it("gives L of the density", () => {
    expect(Math.abs(pull(quantities.diffusion_length!, Math.sqrt(d * tau)))).toBeLessThan(4);
  });
});
