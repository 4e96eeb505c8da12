import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { resolutionOf, similarLight } from "../../../src/field/similar/similar-light.ts";
import { at, difference, moments, picture, problem, square, TURNED } from "./problems.ts";

describe("closed forms", () => {
  it("plain diffusion is the Gaussian with Σ₀ + 2Dt and exp(−t/τ) of the light (Einstein 1905)", () => {
    const light = similarLight(problem(TURNED));
    const grid = square(7, 0.1);
    const t = 6;
    const { amount, covariance } = moments(picture(light, 3, grid), grid);
    expect(amount).toBeCloseTo(Math.exp(-1), 9);
    TURNED.start.forEach((value, k) => {
      expect(covariance[k]).toBeCloseTo(value + 2 * TURNED.diffusion[k]! * t, 9);
    });
    expect(light.amount(3)).toBeCloseTo(Math.exp(-1), 12);
  });

  it.each([0.05, 0.5, 1.7])(
    "without diffusion each point follows n₀e^(−t/τ)/(1 + k n₀τ(1 − e^(−t/τ))), k n₀ = %f",
    (k) => {
      const light = similarLight(problem({ diffusion: [0, 0, 0], annihilation: k }));
      for (const [frame, t] of [
        [1, 0.5],
        [3, 6],
      ] as const) {
        const decay = Math.exp(-t / 6);
        const peak = ((1 / (2 * Math.PI * 0.1)) * decay) / (1 + k * 6 * (1 - decay));
        for (const r of [0, 0.2, 0.4, 0.7, 1.1]) {
          const n0 = Math.exp((-0.5 * r * r) / 0.1);
          const n = ((1 / (2 * Math.PI * 0.1)) * n0 * decay) / (1 + k * n0 * 6 * (1 - decay));
          expect(Math.abs(at(light, frame, r, 0) - n) / peak).toBeLessThan(2e-5);
        }
      }
    },
  );

  it("all light under annihilation without diffusion is ln(1 + κy)/(κy) of the decay, y = τ(1 − e^(−t/τ))", () => {
    // ∫ u/(1 + κyu) dA over a Gaussian u = e^(−r²/2): 2π ln(1 + κy)/(κy)
    const light = similarLight(problem({ diffusion: [0, 0, 0], annihilation: 0.5 }));
    const met = 0.5 * 6 * (1 - Math.exp(-2));
    expect(light.amount(4)).toBeCloseTo((Math.exp(-2) * Math.log1p(met)) / met, 8);
  });

  it("caught and free light follow dm/dt = cn − m/τ_m", () => {
    const [c, trap, t] = [0.15, 15, 6];
    const light = similarLight(problem({ capture: c, trapLifetime: trap, trapLight: 0.7 }));
    const rate = 1 / 6 + c;
    const free = Math.exp(-rate * t);
    const caught = (c * (Math.exp(-t / trap) - free)) / (rate - 1 / trap);
    expect(light.amount(3)).toBeCloseTo(free + 0.7 * caught, 10);
    expect(light.caughtShare(3)).toBeCloseTo((0.7 * caught) / (free + 0.7 * caught), 10);
  });

  it("nothing is lost: free and caught excitons stay one where nothing ends", () => {
    const forever = { lifetime: Infinity, trapLifetime: Infinity, capture: 0.3, trapLight: 1 };
    for (const shape of [{}, TURNED]) {
      const light = similarLight(problem(forever, shape));
      const grid = square(6, 0.1);
      expect(light.amount(4)).toBeCloseTo(1, 10);
      expect(moments(picture(light, 4, grid), grid).amount).toBeCloseTo(1, 5);
    }
  });

  it("the variance grows by 2D + k n σ²/4 per time at first, k n at the centre", () => {
    const [k, h] = [0.5, 0.02];
    const grid = square(2.6, 0.05);
    const light = similarLight(problem({ annihilation: k, delays: [0, h, 2 * h] }));
    const [v0, v1, v2] = [0, 1, 2].map((i) => moments(picture(light, i, grid), grid).covariance[0]);
    const slope = (4 * v1! - v2! - 3 * v0!) / (2 * h);
    const expected = 2 * 0.02 + (k * 0.1) / 4;
    expect(Math.abs(slope / expected - 1)).toBeLessThan(1e-4);
  });

  it("repulsion spreads it at first by 2D(1 + β/4) along every axis, and loses nothing", () => {
    const [beta, h] = [2, 0.02];
    const grid = square(2.6, 0.05);
    for (const shape of [{}, TURNED]) {
      const p = problem({ repulsion: beta, lifetime: Infinity, delays: [0, h, 2 * h, 12] }, shape);
      const light = similarLight(p);
      const [v0, v1, v2] = [0, 1, 2].map((i) => moments(picture(light, i, grid), grid).covariance);
      for (const i of [0, 1, 2] as const) {
        const slope = (4 * v1![i] - v2![i] - 3 * v0![i]) / (2 * h);
        expect(Math.abs(slope - 2 * p.diffusion[i] * (1 + beta / 4))).toBeLessThan(
          1e-4 * 2 * p.diffusion[0] * (1 + beta / 4),
        );
      }
      expect(light.amount(3)).toBeCloseTo(1, 12);
    }
  });

  it("repulsion needs diffusion to push along: a D of zero or below is refused", () => {
    expect(() => similarLight(problem({ repulsion: 1, diffusion: [-0.001, 0, -0.001] }))).toThrow(RangeError);
  });

  it("an elliptical spot loses as many excitons as the round one of the same area and mapped diffusion", () => {
    const round = similarLight(problem({ annihilation: 1 }));
    const stretched = similarLight(
      problem({ annihilation: 1, start: [0.4, 0, 0.1], diffusion: [0.08, 0, 0.02] }),
    );
    expect(stretched.amount(4)).toBeCloseTo(round.amount(4), 12);
  });

  it("round and planar bases agree where the axes differ by next to nothing", () => {
    const grid = square(1.5, 0.15);
    const part = { annihilation: 1, capture: 0.1 };
    const round = similarLight(problem(part));
    const planar = similarLight(problem(part, { diffusion: [0.02, 1e-9, 0.02 + 1e-9] }));
    expect(difference(picture(planar, 2, grid), picture(round, 2, grid))).toBeLessThan(1e-5);
  });
});

interface Row {
  free: number;
  free_variance: number;
  free_centre: number;
  caught?: number;
  caught_variance?: number;
  covariance: [number, number, number];
}
interface Case {
  name: string;
  tau: number;
  k: number;
  c: number;
  tau_m: number;
  sigma2: number;
  d: number;
  sigma: [number, number, number];
  tensor: [number, number, number];
  rows: Row[];
}
const reference = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../data/scipy/reaction-diffusion.json"), "utf8"),
) as { times: number[]; round: Case[]; turned: Case };

describe("SciPy's solution (scripts/make-reference-stacks.py)", () => {
  it.each(reference.round)("round: $name", ({ tau, k, c, tau_m, sigma2, d, rows }) => {
    const peak = 1 / (2 * Math.PI * sigma2);
    const parts = {
      start: [sigma2, 0, sigma2] as const,
      diffusion: [d, 0, d] as const,
      lifetime: tau,
      annihilation: k * peak,
      capture: c,
      trapLifetime: tau_m,
      delays: reference.times,
    };
    const free = similarLight(problem(parts, { trapLight: 0 }));
    const caught = similarLight(problem(parts, { trapLight: 1e9 }));
    const grid = square(8, 0.1);
    rows.forEach((row, i) => {
      expect(free.amount(i) / row.free).toBeCloseTo(1, 5);
      expect(at(free, i, 0, 0) / row.free_centre).toBeCloseTo(1, 5);
      expect(moments(picture(free, i, grid), grid).covariance[0] / row.free_variance).toBeCloseTo(1, 5);
      if (row.caught === undefined) return;
      expect(caught.amount(i) / 1e9 / row.caught).toBeCloseTo(1, 5);
      expect(moments(picture(caught, i, grid), grid).covariance[0] / row.caught_variance!).toBeCloseTo(1, 5);
    });
  });

  it(`turned: ${reference.turned.name}`, () => {
    const { tau, k, sigma, tensor, rows } = reference.turned;
    const peak = 1 / (2 * Math.PI * Math.sqrt(sigma[0] * sigma[2] - sigma[1] ** 2));
    const light = similarLight(
      problem({
        start: sigma,
        diffusion: tensor,
        lifetime: tau,
        annihilation: k * peak,
        delays: reference.times,
      }),
    );
    const grid = square(6, 0.08);
    rows.forEach((row, i) => {
      const seen = moments(picture(light, i, grid), grid);
      expect(light.amount(i) / row.free).toBeCloseTo(1, 5);
      expect(at(light, i, 0, 0) / row.free_centre).toBeCloseTo(1, 5);
      row.covariance.forEach((value, axis) => {
        expect(Math.abs(seen.covariance[axis]! - value) / row.covariance[0]).toBeLessThan(1e-5);
      });
    });
  });
});

describe("resolution", () => {
  it.each([
    ["k n₀τ = 3", { annihilation: 0.5 }],
    ["k n₀τ = 10", { annihilation: 1.67 }],
    ["k n₀τ = 10, narrow spot", { annihilation: 1.67, start: [0.03, 0, 0.03] as const }],
    ["k n₀τ = 0.3 with capture", { annihilation: 0.05, capture: 0.3 }],
    ["short-lived traps", { capture: 0.3, trapLifetime: 0.05 }],
    ["k n₀τ = 3, turned", { annihilation: 0.5, ...TURNED }],
  ])("chosen by itself is within 1e-5 of the peak of one twice as fine: %s", (_, part) => {
    const coarse = problem(part, { blurVariance: 0.01, pixel: 0.1, gate: 0.3 });
    const chosen = resolutionOf(coarse);
    const fine = similarLight(coarse, {
      modes: Math.round(1.5 * chosen.modes),
      panels: 2 * chosen.panels,
      radialStep: chosen.radialStep / 2,
      planarStep: chosen.planarStep / 2,
    });
    const light = similarLight(coarse);
    const grid = { x0: -1.53, y0: -1.47, pixel: 0.15, width: 21, height: 21 };
    for (const i of [0, 1, 2, 3, 4]) {
      expect(difference(picture(light, i, grid), picture(fine, i, grid))).toBeLessThan(1e-5);
    }
  });
});
