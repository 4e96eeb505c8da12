import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { Evolution } from "../../src/field/evolution.ts";
import { type Grid, gaussianOnGrid, gridFor, moments } from "../../src/field/grid.ts";
import { type Medium, peakDensity, plainMedium, type Start } from "../../src/field/medium.ts";
import { pushedTime } from "../../src/field/pushed-spread.ts";
import { nodesOver } from "../../src/field/quadrature.ts";
import { similarLight } from "../../src/field/similar/similar-light.ts";
import { travelled } from "../../src/field/similar/travelled.ts";
import { movingTime } from "../../src/field/travel.ts";
import type { Covariance } from "../../src/frame/spot.ts";
import { at, picture, moments as pictureMoments, problem, square } from "./similar/problems.ts";

const ROUND: Start = { amount: 1, covariance: [0.1, 0, 0.1] };
const TURNED: Start = { amount: 1, covariance: [0.1, 0.02, 0.08] };
const TENSOR: Covariance = [0.02, 0.006, 0.01];

function pushed(beta: number, diffusion: Covariance, start: Start, lifetime = 6): Medium {
  return { ...plainMedium(diffusion, lifetime), repulsion: beta / peakDensity(start) };
}

function gridUpTo(medium: Medium, start: Start, t: number, clearance = 6, resolution = 3): Grid {
  const reached = pushedTime(medium, start, t);
  return gridFor(start.covariance, medium.diffusion, reached, { clearance, resolution });
}

const SIDE = 64;

/** ∫n² dA/∫n dA */
function meanDensity(field: Float64Array): number {
  let [one, two] = [0, 0];
  for (const n of field) {
    one += n;
    two += n * n;
  }
  return two / one;
}

describe("Evolution with repulsion", () => {
  it.each([0.3, 1, 5])(
    "widens at first by dΣ/dt = 2D(1 + β/4), a turned tensor alike: β = %d (second moment of ½b∇·D∇n² for a Gaussian)",
    (beta) => {
      const medium = pushed(beta, TENSOR, TURNED, Infinity);
      const growth = (t: number): number[] => {
        const grid = gridUpTo(medium, TURNED, t, 8, 4);
        const evolution = new Evolution(medium, TURNED, grid, 1e-9);
        evolution.advance(t);
        const { covariance } = moments(grid, evolution.free);
        return covariance.map((value, i) => (value - TURNED.covariance[i]!) / t);
      };
      // Neville's extrapolation of difference quotients to t = 0
      const h = 0.2 / (1 + beta);
      const [a, b, c] = [growth(h), growth(h / 2), growth(h / 4)];
      TENSOR.forEach((d, i) => {
        const atZero = (4 * (2 * c[i]! - b[i]!) - (2 * b[i]! - a[i]!)) / 3;
        expect(Math.abs(atZero / (2 * d * (1 + beta / 4)) - 1)).toBeLessThan(1e-4);
      });
    },
  );

  it("widens ever after by dσ²/dt = 2D + Db∫n²/∫n per axis, decay or not (second moment, twice by parts)", () => {
    const d = 0.02;
    const medium = pushed(4, [d, 0, d], ROUND, 3);
    const grid = gridUpTo(medium, ROUND, 6);
    const evolution = new Evolution(medium, ROUND, grid, 1e-8);
    let before = 0.1;
    for (const [from, to] of [
      [0, 1],
      [1, 3],
      [3, 6],
    ] as const) {
      let gained = 2 * d * (to - from);
      for (const { at, weight } of nodesOver(from, to, 6)) {
        evolution.advance(at);
        gained += weight * d * medium.repulsion * meanDensity(evolution.free);
      }
      evolution.advance(to);
      const now = moments(grid, evolution.free).covariance[0];
      expect(Math.abs((now - before) / gained - 1)).toBeLessThan(1e-6);
      before = now;
    }
  });

  it("keeps the number of excitons to 1e-10 and no density below zero by 1e-6 of the peak, for β up to 10", () => {
    for (const [beta, start, diffusion] of [
      [0.5, TURNED, TENSOR],
      [10, ROUND, [0.01, 0, 0.01]],
    ] as const) {
      const medium = pushed(beta, diffusion, start, 6);
      const grid = gridUpTo(medium, start, 2);
      const evolution = new Evolution(medium, start, grid, 1e-6);
      const before = moments(grid, evolution.free).amount;
      for (const t of [0.1, 0.5, 2]) {
        evolution.advance(t);
        const { amount } = moments(grid, evolution.free);
        expect(Math.abs(amount / before / Math.exp(-t / 6) - 1)).toBeLessThan(1e-10);
        expect(Math.min(...evolution.free)).toBeGreaterThan(-1e-6 * evolution.peak);
      }
    }
  });

  it("becomes Barenblatt's n = t^(−½)(C − r²/16√t) of n_t = Δn² where bn ≫ 1 (Vázquez, The Porous Medium Equation, 2007, ch. 4)", () => {
    // n_t = ½bD Δn² with D as small as it gets: error of first order in 1/(bn), extrapolated to none
    const c = 1;
    const radius = (t: number): number => 4 * Math.sqrt(c) * t ** 0.25;
    const run = (share: number) => {
      const start: Start = { amount: 2 * Math.PI * c, covariance: [1, 0, 1] };
      const medium: Medium = { ...plainMedium([share, 0, share], Infinity), repulsion: 2 / share };
      const grid: Grid = { nx: SIDE, ny: SIDE, hx: 18 / SIDE, hy: 18 / SIDE };
      const evolution = new Evolution(medium, start, grid, 1e-4);
      for (let iy = 0; iy < SIDE; iy++) {
        for (let ix = 0; ix < SIDE; ix++) {
          const [x, y] = [ix, iy].map((i) => (i < SIDE / 2 ? i : i - SIDE) * grid.hx) as [number, number];
          evolution.free[iy * SIDE + ix] = Math.max(c - (x * x + y * y) / 16, 0);
        }
      }
      evolution.advance(4);
      return [evolution.free[0]!, moments(grid, evolution.free).covariance[0]];
    };
    const [coarse, fine] = [run(0.04), run(0.02)];
    const [centre, variance] = fine.map((value, i) => 2 * value - coarse[i]!);
    expect(Math.abs(centre! / (c / Math.sqrt(5)) - 1)).toBeLessThan(2e-3);
    // ∫r²(1 − r²/R²)/∫(1 − r²/R²) = R²/3, half of it per axis
    expect(Math.abs(variance! / (radius(5) ** 2 / 6) - 1)).toBeLessThan(2e-3);
  });

  it.each([
    [0.1, 0, 0, 1],
    [1, 0, 0, 1],
    [3, 0, 1, 1],
    [1, 5, 0, 1],
    [10, 0, 0, 0.3],
  ])(
    "holds its tolerance when the step is halved: β = %d, k n₀ τ = %d, c τ = %d, Dτ/σ² = %d",
    (beta, kT, cT, q) => {
      const d = (q * 0.1) / 6;
      const medium: Medium = {
        ...pushed(beta, [d, 0, d], ROUND),
        annihilation: kT / 6 / peakDensity(ROUND),
        capture: cT / 6,
        trapLight: 1,
        trapLifetime: 20,
      };
      const grid = gridUpTo(medium, ROUND, 12, 5, 2.5);
      const run = (tolerance: number, halved: boolean) => {
        const evolution = new Evolution(medium, ROUND, grid, tolerance);
        // stops in between make shorter steps
        if (halved) for (let t = 0.02; t < 12; t += 0.02 + t / 60) evolution.advance(t);
        evolution.advance(12);
        const caught = new Float64Array(evolution.free.length);
        evolution.transform.toField(evolution.caught.slice(), caught);
        return evolution.free.map((n, i) => n + caught[i]!);
      };
      const coarse = run(1e-6, false);
      const fine = run(1e-12, true);
      const peak = Math.max(...fine);
      const error = Math.max(...coarse.map((light, i) => Math.abs(light - fine[i]!))) / peak;
      expect(error).toBeLessThan(1e-6);
    },
  );

  it("does not change by more than 2e-6 on a finer and wider grid", () => {
    const medium = pushed(2, TENSOR, TURNED);
    const run = (clearance: number, resolution: number) => {
      const grid = gridUpTo(medium, TURNED, 3, clearance, resolution);
      const evolution = new Evolution(medium, TURNED, grid, 1e-7);
      evolution.advance(3);
      const { amount, covariance } = moments(grid, evolution.free);
      return [amount, covariance[0], covariance[1], covariance[2], evolution.free[0]!];
    };
    const normal = run(6, 3);
    run(7, 5).forEach((fine, i) => {
      expect(Math.abs(normal[i]! / fine - 1)).toBeLessThan(2e-6);
    });
  });
});

interface Reference {
  readonly times: number[];
  readonly round: {
    readonly name: string;
    readonly sigma2: number;
    readonly d: number;
    readonly tau: number;
    readonly k: number;
    readonly b: number;
    readonly rows: { free: number; free_variance: number; free_centre: number }[];
  }[];
}

// scripts/make-reference-stacks.py: finite volumes on rings with scipy.integrate.solve_ivp
const REFERENCE: Reference = JSON.parse(
  readFileSync(new URL("../data/scipy/repulsion.json", import.meta.url), "utf8"),
);

describe("repulsion against finite volumes in SciPy", () => {
  it.each(REFERENCE.round)(
    "the Fourier solver gives amounts, variances and centre of $name to 1e-5",
    (one) => {
      const { sigma2, d, tau, k, b, rows } = one;
      const start: Start = { amount: 1, covariance: [sigma2, 0, sigma2] };
      const medium: Medium = { ...plainMedium([d, 0, d], tau), repulsion: b, annihilation: k };
      const grid = gridUpTo(medium, start, REFERENCE.times.at(-1)!, 7);
      const evolution = new Evolution(medium, start, grid, 1e-7);
      rows.forEach((row, i) => {
        evolution.advance(REFERENCE.times[i]!);
        const { amount, covariance } = moments(grid, evolution.free);
        expect(Math.abs(amount / row.free - 1)).toBeLessThan(1e-5);
        expect(Math.abs(covariance[0] / row.free_variance - 1)).toBeLessThan(1e-5);
        expect(Math.abs(evolution.free[0]! / row.free_centre - 1)).toBeLessThan(1e-5);
      });
    },
  );

  it.each(REFERENCE.round)(
    "the quick solver gives the same of $name to 3e-5, to 2e-4 where the spot has an edge",
    (one) => {
      const { sigma2, d, tau, k, b, rows } = one;
      const peak = 1 / (2 * Math.PI * sigma2);
      const close = b * peak > 5 ? 2e-4 : 3e-5;
      const light = similarLight(
        problem({
          start: [sigma2, 0, sigma2],
          diffusion: [d, 0, d],
          lifetime: tau,
          repulsion: b * peak,
          annihilation: k * peak,
          delays: REFERENCE.times,
        }),
      );
      const grid = square(5, 0.08);
      rows.forEach((row, i) => {
        expect(Math.abs(light.amount(i) / row.free - 1)).toBeLessThan(close);
        expect(Math.abs(at(light, i, 0, 0) / row.free_centre - 1)).toBeLessThan(close);
        const { covariance } = pictureMoments(picture(light, i, grid), grid);
        expect(Math.abs(covariance[0] / row.free_variance - 1)).toBeLessThan(close);
      });
    },
  );
});

describe("movingTime with repulsion", () => {
  it.each([1, 8])("times D is ½⟨x²⟩ of where excitons end, less that of the start: β = %d", (beta) => {
    const tau = 1.5;
    const d = 0.05;
    const medium = pushed(beta, [d, 0, d], ROUND, tau);
    const end = 9;
    const grid = gridUpTo(medium, ROUND, end, 5.5, 2.5);
    const evolution = new Evolution(medium, ROUND, grid, 1e-6);
    const travelled = () => 0.5 * (moments(grid, evolution.free).covariance[0] - 0.1);
    let ends = 0;
    for (const [from, to] of [
      [0, 1],
      [1, 4],
      [4, end],
    ] as const) {
      for (const { at, weight } of nodesOver(from, to, 4 / (to - from) + 1 / tau)) {
        evolution.advance(at);
        ends += (weight * travelled() * Math.exp(-at / tau)) / tau;
      }
    }
    evolution.advance(end);
    // the few that are left spread by themselves
    ends += Math.exp(-end / tau) * (travelled() + d * tau);
    expect(Math.abs((d * movingTime(medium, ROUND)) / ends - 1)).toBeLessThan(2e-5);
  });

  it("is that of a core on a foot too, by the quick solver against the sum over one grid", () => {
    const [tau, d, beta, end] = [1.5, 0.05, 2, 9];
    const foot = { share: 0.3, ratio: 2.5 };
    const wide = 0.1 * foot.ratio;
    const peak = 0.7 / (2 * Math.PI * 0.1) + 0.3 / (2 * Math.PI * wide);
    const start: Start = { amount: 2 * Math.PI * wide * peak, covariance: [wide, 0, wide] };
    const medium = pushed(beta, [d, 0, d], start, tau);
    const grid: Grid = { nx: 128, ny: 128, hx: 0.1, hy: 0.1 };
    const evolution = new Evolution(medium, start, grid, 1e-6);
    const [core, outer] = [
      gaussianOnGrid(grid, 0.7, [0.1, 0, 0.1]),
      gaussianOnGrid(grid, 0.3, [wide, 0, wide]),
    ];
    evolution.free.set(core.map((n, i) => n + outer[i]!));
    let sum = 0;
    for (const [from, to] of [
      [0, 1],
      [1, 4],
      [4, end],
    ] as const) {
      for (const { at, weight } of nodesOver(from, to, 4 / (to - from) + 1 / tau)) {
        evolution.advance(at);
        const { amount } = moments(grid, evolution.free);
        sum += weight * amount * (1 + 0.5 * medium.repulsion * meanDensity(evolution.free));
      }
    }
    sum += Math.exp(-end / tau) * tau;
    const quick = travelled(
      problem({ foot, start: [0.1, 0, 0.1], diffusion: [d, 0, d], lifetime: tau, repulsion: beta }),
    );
    expect(Math.abs(quick / (d * sum) - 1)).toBeLessThan(3e-4);
  });
});
