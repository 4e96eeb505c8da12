import { describe, expect, it } from "vitest";
import { Evolution } from "../../src/field/evolution.ts";
import { gridFor, moments } from "../../src/field/grid.ts";
import { type Medium, peakDensity, plainMedium, type Start, tensorFromAxes } from "../../src/field/medium.ts";
import { nodesOver } from "../../src/field/quadrature.ts";
import { movingTime } from "../../src/field/travel.ts";

const START: Start = { amount: 1, covariance: [0.1, 0.02, 0.08] };

function annihilating(kN0: number, diffusion: Medium["diffusion"], lifetime: number): Medium {
  return { ...plainMedium(diffusion, lifetime), annihilation: kN0 / peakDensity(START) };
}

describe("movingTime", () => {
  it("is 1/(1/τ + c) without annihilation", () => {
    const medium = { ...plainMedium([0.05, 0, 0.05], 6), capture: 0.3, trapLight: 1, trapLifetime: 15 };
    expect(movingTime(medium, START)).toBeCloseTo(1 / (1 / 6 + 0.3), 12);
  });

  it("is −τ Li₂(−A)/A on a spot that stands still, A = k n₀ τ (integral of e^(−t/τ) ln(1 + a)/a)", () => {
    // Li₂(−3) = scipy.special.spence(4)
    expect(movingTime(annihilating(0.5, [0, 0, 0], 6), START) / ((6 * 1.9393754207667087) / 3)).toBeCloseTo(
      1,
      5,
    );
  });

  it("agrees to 1e-5 with the sum over one large fixed grid, for a spot that grows sixfold along a turned tensor", () => {
    const medium = annihilating(2, tensorFromAxes(0.2, 0.05, 0.7), 3);
    const grid = gridFor(START.covariance, medium.diffusion, 20, { clearance: 6, resolution: 3 });
    const evolution = new Evolution(medium, START, grid, 1e-6);
    let sum = 0;
    for (const [from, to] of [
      [0, 0.3],
      [0.3, 1],
      [1, 3],
      [3, 8],
      [8, 20],
    ] as const) {
      for (const { at, weight } of nodesOver(from, to, 1 / (to - from))) {
        evolution.advance(at);
        sum += weight * moments(grid, evolution.free).amount;
      }
    }
    evolution.advance(20);
    // hardly any annihilation is left at 20 ns: the rest decays with τ
    const exact = sum + moments(grid, evolution.free).amount * 3;
    expect(Math.abs(movingTime(medium, START) / exact - 1)).toBeLessThan(1e-5);
  });
});
