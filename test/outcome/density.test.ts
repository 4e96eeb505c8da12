import { describe, expect, it } from "vitest";
import { densityOf } from "../../src/outcome/density.ts";
import type { Quantity } from "../../src/outcome/result.ts";
import type { Acquisition } from "../../src/stack/acquisition.ts";
import { recorded, resultOf } from "./recordings.ts";

const { acquisition } = recorded({ recording: { frames: 3 } }).stack;

const sampled = (sample: Partial<Acquisition["sample"]>): Acquisition => ({
  ...acquisition,
  sample: { ...acquisition.sample, ...sample },
});
const exactly = (value: number, u = 0) => ({ value, u });
const mobility: Quantity = {
  value: 100,
  u: 5,
  u_statistical: 5,
  u_systematic: 0,
  interval95: [90, 110],
  unit: "cm^2/(V s)",
  from: "outcome",
};

describe("the density from a blue shift", () => {
  const layers = { layerDistance: exactly(0.6), permittivity: exactly(7) };

  it("is 1e11 cm⁻² for 1.55 meV at d = 0.6 nm and ε_r = 7", () => {
    // plate capacitor ΔE = e²nd/(ε₀ε_r), Laikhtman and Rapaport, Phys. Rev. B 80 (2009) 195313; worked by hand:
    // 1.602176634e-19 · 1e15 · 0.6e-9 / (8.8541878188e-12 · 7) V = 1.5510 mV
    const found = densityOf(sampled({ blueShift: exactly(1.551), ...layers }), null)!;
    expect(found.density_per_cm2.value / 1e11).toBeCloseTo(1, 3);
    expect(found.from).toBe("blue shift");
  });

  it("carries the uncertainties of shift, distance and permittivity", () => {
    const found = densityOf(
      sampled({
        blueShift: exactly(4, 0.4),
        layerDistance: exactly(0.65, 0.65 * 0.05),
        permittivity: exactly(7, 7 * 0.02),
      }),
      null,
    )!;
    expect(found.density_per_cm2.u / found.density_per_cm2.value).toBeCloseTo(Math.hypot(0.1, 0.05, 0.02), 3);
  });

  it("gives way to a density that is stated, and is none where something is missing", () => {
    const stated = densityOf(sampled({ density: exactly(2000), blueShift: exactly(4), ...layers }), null)!;
    expect(stated.density_per_cm2.value).toBe(2e11);
    expect(stated.from).toBe("stated");
    expect(densityOf(sampled({ blueShift: exactly(4), layerDistance: exactly(0.6) }), null)).toBeNull();
    expect(densityOf(acquisition, null)).toBeNull();
  });
});

describe("degeneracy", () => {
  const dense = { density: exactly(1000), mass: exactly(1) };

  it("sets in at 5.56 K for 1e11 cm⁻² and the mass of an electron", () => {
    // 2πħ²n/(m₀k_B) = 2π·(1.054571817e-34)²·1e15/(9.1093837e-31·1.380649e-23) K
    const found = densityOf(sampled(dense), null)!;
    expect(found.degeneracy_temperature_k!.value).toBeCloseTo(5.556, 2);
    expect(densityOf(sampled({ density: exactly(1000) }), null)!.degeneracy_temperature_k).toBeNull();
  });

  it.each([
    // x/(eˣ − 1) of bosons, x/(1 − e⁻ˣ) of fermions at x = 5.556/4 = 1.389: D/μ over k_BT/e
    ["bosons", 1, 1.389 / Math.expm1(1.389)],
    ["fermions", 2, 1.389 / -Math.expm1(-1.389)],
  ] as const)(
    "at 4 K divides the Einstein relation by the factor of ideal %s",
    (_, emissionOrder, factor) => {
      const found = densityOf(sampled({ ...dense, temperature: exactly(4), emissionOrder }), mobility)!;
      expect(found.filling!).toBeCloseTo(1.389, 3);
      expect(found.degenerate_mobility!.value * factor).toBeCloseTo(100, 1);
      expect(found.degenerate_mobility!.u / found.degenerate_mobility!.value).toBeCloseTo(0.05, 10);
    },
  );

  it("is not shown at room temperature", () => {
    expect(
      densityOf(sampled({ ...dense, temperature: exactly(300) }), mobility)!.degenerate_mobility,
    ).toBeNull();
  });

  it("stands in the result", () => {
    const result = resultOf(
      recorded({ sample: { density: "1e11 cm^-2", mass: 1, temperature: "4 K" } }).stack,
    );
    expect(result.density!.density_per_cm2.value / 1e11).toBeCloseTo(1, 10);
    const { mobility: plain } = result.quantities;
    expect(result.density!.degenerate_mobility!.value / plain!.value).toBeCloseTo(
      Math.expm1(1.389) / 1.389,
      2,
    );
  });
});
