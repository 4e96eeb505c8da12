import { expect, it } from "vitest";
import {
  boltzmann,
  electronMass,
  elementaryCharge,
  planck,
  reducedPlanck,
  vacuumPermittivity,
} from "../../src/numerics/constants.ts";

it("e, k_B and h are those that the SI of 2019 fixes (26th CGPM, Resolution 1)", () => {
  expect(elementaryCharge).toBe(1.602176634e-19);
  expect(boltzmann).toBe(1.380649e-23);
  expect(planck).toBe(6.62607015e-34);
});

it("e/k_B is 38.68 V⁻¹ at 300 K, and k_B/e 8.617333262…e-5 V/K (CODATA 2022)", () => {
  expect(elementaryCharge / boltzmann / 300).toBeCloseTo(38.68, 2);
  expect((boltzmann / elementaryCharge) * 1e5).toBeCloseTo(8.617333262, 8);
  // The exact ratio is that of the two integers 1602176634 and 1380649, times 10.
  expect(elementaryCharge / boltzmann).toBeCloseTo((1602176634 / 1380649) * 10, 9);
});

it("ħ is 1.054571817…e-34 J s (CODATA 2022)", () => {
  expect(reducedPlanck * 1e34).toBeCloseTo(1.054571817, 8);
});

it("ε₀ and the electron's mass are those of CODATA 2022, as in SciPy 1.17's table", () => {
  expect(vacuumPermittivity).toEqual({ value: 8.8541878188e-12, u: 1.4e-21 });
  expect(electronMass).toEqual({ value: 9.1093837139e-31, u: 2.8e-40 });
});
