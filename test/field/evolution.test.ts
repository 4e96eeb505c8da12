import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { lightPerPixel } from "../../src/field/aperture.ts";
import { Evolution } from "../../src/field/evolution.ts";
import { type Grid, gridFor, moments } from "../../src/field/grid.ts";
import { type Medium, peakDensity, plainMedium, type Start } from "../../src/field/medium.ts";
import type { Covariance } from "../../src/frame/spot.ts";

const SPOT: Covariance = [0.1, 0.02, 0.08];
const START: Start = { amount: 1, covariance: SPOT };
const TENSOR: Covariance = [0.02, 0.006, 0.01];
const ACCURACY = { clearance: 6, resolution: 3 };

function annihilating(kN0: number, diffusion: Covariance, start: Start, lifetime = 6): Medium {
  return { ...plainMedium(diffusion, lifetime), annihilation: kN0 / peakDensity(start) };
}

function atOrigin(grid: Grid, spectrum: Float64Array): number {
  const size = 1e-4;
  const line = {
    columns: 1,
    rows: 1,
    pixelX: size,
    pixelY: size,
    delays: [0],
    gate: 0,
    period: null,
    responseSigma: 0,
  };
  const still = { psfVariance: 0, centre: [0, 0], drift: [0, 0] } as const;
  return lightPerPixel(grid, spectrum, { ...line, ...still }, [0, 0])[0]! / size ** 2;
}

describe("Evolution without reactions", () => {
  const medium = plainMedium(TENSOR, Infinity);
  const grid = gridFor(SPOT, TENSOR, 20, ACCURACY);

  it("keeps the number of excitons to 1e-10 over many steps", () => {
    const evolution = new Evolution(medium, START, grid, 1e-6);
    const before = moments(grid, evolution.free).amount;
    for (let t = 0.1; t < 20; t += 0.1) evolution.advance(t);
    expect(Math.abs(moments(grid, evolution.free).amount / before - 1)).toBeLessThan(1e-10);
  });

  it("agrees with the closed-form Gaussian to 1e-6 of its peak everywhere (Einstein 1905: Σ₀ + 2Dt)", () => {
    const evolution = new Evolution(medium, START, grid, 1e-6);
    evolution.advance(7);
    evolution.advance(20);
    const [xx, xy, yy] = [0.1 + 40 * 0.02, 0.02 + 40 * 0.006, 0.08 + 40 * 0.01];
    const det = xx * yy - xy * xy;
    const peak = 1 / (2 * Math.PI * Math.sqrt(det));
    let worst = 0;
    for (let iy = 0; iy < grid.ny; iy++) {
      for (let ix = 0; ix < grid.nx; ix++) {
        const x = (ix < grid.nx / 2 ? ix : ix - grid.nx) * grid.hx;
        const y = (iy < grid.ny / 2 ? iy : iy - grid.ny) * grid.hy;
        const exact = peak * Math.exp(-0.5 * ((yy * x * x - 2 * xy * x * y + xx * y * y) / det));
        worst = Math.max(worst, Math.abs(evolution.free[iy * grid.nx + ix]! - exact));
      }
    }
    expect(worst / peak).toBeLessThan(1e-6);
  });
});

describe("Evolution with annihilation", () => {
  it("gives the closed form n₀e^(−t/τ)/(1 + k n₀ τ (1 − e^(−t/τ))) on a uniform field", () => {
    const medium = annihilating(2, TENSOR, START);
    const evolution = new Evolution(medium, START, gridFor(SPOT, TENSOR, 5, ACCURACY), 1e-6);
    const n0 = peakDensity(START);
    evolution.free.fill(n0);
    evolution.advance(5);
    const exact = (n0 * Math.exp(-5 / 6)) / (1 + 2 * 6 * (1 - Math.exp(-5 / 6)));
    for (const n of evolution.free) expect(Math.abs(n / exact - 1)).toBeLessThan(1e-9);
  });

  it("widens at first by dσ²/dt = 2D + k n₀ σ²/4 per axis (second moment of −k n² for a 2-D Gaussian)", () => {
    const sigma2 = 0.1;
    const start: Start = { amount: 1, covariance: [sigma2, 0, sigma2] };
    const d = 0.01;
    const kN0 = 0.7;
    const grid = gridFor(start.covariance, [d, 0, d], 1, { clearance: 8, resolution: 4 });
    const growth = (t: number) => {
      const evolution = new Evolution(annihilating(kN0, [d, 0, d], start), start, grid, 1e-9);
      evolution.advance(t);
      return (moments(grid, evolution.free).covariance[0] - sigma2) / t;
    };
    // Neville's extrapolation of difference quotients to t = 0
    const [a, b, c] = [growth(0.08), growth(0.04), growth(0.02)];
    const atZero = (4 * (2 * c - b) - (2 * b - a)) / 3;
    expect(Math.abs(atZero / (2 * d + (kN0 * sigma2) / 4) - 1)).toBeLessThan(1e-4);
  });

  it.each([
    [0.3, 0, 1],
    [10, 0, 2],
    [3, 2, 1],
    [30, 0, 0.5],
  ])(
    "holds its tolerance when the step is halved and halved again: k n₀ τ = %d, c τ = %d, Dτ/σ² = %d",
    (kT, cT, q) => {
      const start: Start = { amount: 1, covariance: [0.1, 0, 0.1] };
      const d = (q * 0.1) / 6;
      const medium: Medium = {
        ...annihilating(kT / 6, [d, 0, d], start),
        capture: cT / 6,
        trapLight: 1,
        trapLifetime: 20,
      };
      const grid = gridFor(start.covariance, medium.diffusion, 12, { clearance: 5, resolution: 2.5 });
      const run = (tolerance: number) => {
        const evolution = new Evolution(medium, start, grid, tolerance);
        evolution.advance(12);
        const caught = new Float64Array(evolution.free.length);
        evolution.transform.toField(evolution.caught.slice(), caught);
        return evolution.free.map((n, i) => n + caught[i]!);
      };
      const tolerance = 1e-5;
      const coarse = run(tolerance);
      // error of fourth order: a 256th of the tolerance quarters the step
      const fine = run(tolerance / 256);
      const peak = Math.max(...fine);
      const error = Math.max(...coarse.map((light, i) => Math.abs(light - fine[i]!))) / peak;
      expect(error).toBeLessThan(tolerance);
    },
  );

  it("does not change by more than 1e-6 of the peak on a grid twice as fine and wider", () => {
    const medium = annihilating(10 / 6, TENSOR, START);
    const run = (accuracy: typeof ACCURACY) => {
      const grid = gridFor(SPOT, TENSOR, 10, accuracy);
      const evolution = new Evolution(medium, START, grid, 1e-8);
      evolution.advance(10);
      const { amount, covariance } = moments(grid, evolution.free);
      return [amount, covariance[0], covariance[1], covariance[2], evolution.free[0]!];
    };
    const normal = run(ACCURACY);
    run({ clearance: 7, resolution: 6 }).forEach((fine, i) => {
      expect(Math.abs(normal[i]! / fine - 1)).toBeLessThan(1e-6);
    });
  });
});

interface ReferenceRow {
  readonly free: number;
  readonly free_variance: number;
  readonly free_centre: number;
  readonly caught?: number;
  readonly caught_variance?: number;
}

interface Reference {
  readonly times: number[];
  readonly round: {
    name: string;
    sigma2: number;
    d: number;
    tau: number;
    k: number;
    c: number;
    tau_m: number;
    rows: ReferenceRow[];
  }[];
  readonly turned: {
    sigma: Covariance;
    tensor: Covariance;
    tau: number;
    k: number;
    rows: { free: number; covariance: number[]; free_centre: number }[];
  };
}

// scripts/make-reference-stacks.py: finite volumes and finite differences with scipy.integrate.solve_ivp
const REFERENCE: Reference = JSON.parse(
  readFileSync(new URL("../data/scipy/reaction-diffusion.json", import.meta.url), "utf8"),
);

describe("Evolution against finite volumes in SciPy", () => {
  it.each(REFERENCE.round)("gives amounts, variances and centre of $name to 1e-5", (reference) => {
    const { sigma2, d, tau, k, c, tau_m } = reference;
    const start: Start = { amount: 1, covariance: [sigma2, 0, sigma2] };
    const medium: Medium = {
      diffusion: [d, 0, d],
      lifetime: tau,
      repulsion: 0,
      annihilation: k,
      capture: c,
      trapLight: 1,
      trapLifetime: tau_m,
    };
    const grid = gridFor(start.covariance, medium.diffusion, 12, { clearance: 7, resolution: 3 });
    const evolution = new Evolution(medium, start, grid, 1e-6);
    REFERENCE.times.forEach((t, i) => {
      evolution.advance(t);
      const row = reference.rows[i]!;
      const free = moments(grid, evolution.free);
      expect(Math.abs(free.amount / row.free - 1)).toBeLessThan(1e-5);
      expect(Math.abs(free.covariance[0] / row.free_variance - 1)).toBeLessThan(1e-5);
      expect(Math.abs(evolution.free[0]! / row.free_centre - 1)).toBeLessThan(1e-5);
      if (row.caught === undefined) return;
      const field = new Float64Array(evolution.free.length);
      evolution.transform.toField(evolution.caught.slice(), field);
      const caught = moments(grid, field);
      expect(Math.abs(caught.amount / row.caught - 1)).toBeLessThan(1e-5);
      expect(Math.abs(caught.covariance[0] / row.caught_variance! - 1)).toBeLessThan(1e-5);
    });
  });

  it("gives amount, covariance and centre of a turned tensor with annihilation to 1e-5", () => {
    const { sigma, tensor, tau, k, rows } = REFERENCE.turned;
    const grid = gridFor(sigma, tensor, 6, { clearance: 7, resolution: 3 });
    const medium = { ...plainMedium(tensor, tau), annihilation: k };
    const evolution = new Evolution(medium, { amount: 1, covariance: sigma }, grid, 1e-6);
    rows.forEach((row, i) => {
      evolution.advance(REFERENCE.times[i]!);
      const { amount, covariance } = moments(grid, evolution.free);
      expect(Math.abs(amount / row.free - 1)).toBeLessThan(1e-5);
      covariance.forEach((entry, j) => {
        expect(Math.abs(entry / row.covariance[j]! - 1)).toBeLessThan(1e-5);
      });
      const spectrum = evolution.transform.spectrum();
      evolution.transform.toSpectrum(evolution.free, spectrum);
      expect(Math.abs(atOrigin(grid, spectrum) / row.free_centre - 1)).toBeLessThan(1e-5);
    });
  });
});
