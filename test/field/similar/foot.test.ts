import { describe, expect, it } from "vitest";
import type { SimilarProblem } from "../../../src/field/similar/problem.ts";
import { similarLight } from "../../../src/field/similar/similar-light.ts";
import { travelled } from "../../../src/field/similar/travelled.ts";
import { at, problem, TURNED } from "./problems.ts";

const CORE = { foot: { share: 0.4, ratio: 3 } };
const FLAT = { foot: { share: 1.3, ratio: 2 } };
const RADII = [0, 0.1, 0.2, 0.3, 0.45, 0.7, 1];

/** Peak of the frame, and what differs from it by how much. */
function expectLike(one: (r: number) => number, other: (r: number) => number, tolerance: number): void {
  const peak = Math.max(...RADII.map(other));
  for (const r of RADII) expect(Math.abs(one(r) - other(r))).toBeLessThan(tolerance * peak);
}

describe("a start on a foot", () => {
  it("spreads as the sum of its two Gaussians, where nothing else happens", () => {
    // (1 − h)·G(s + 2Dt) + h·G(qs + 2Dt), times e^(−t/τ)
    for (const { foot } of [CORE, FLAT]) {
      const light = similarLight(problem({ foot }));
      const gauss = (r: number, variance: number): number =>
        Math.exp(-(r * r) / (2 * variance)) / (2 * Math.PI * variance);
      const [frame, t] = [2, 2];
      const exact = (r: number): number =>
        Math.exp(-t / 6) *
        ((1 - foot.share) * gauss(r, 0.1 + 0.04 * t) + foot.share * gauss(r, 0.1 * foot.ratio + 0.04 * t));
      expectLike((r) => at(light, frame, r, 0), exact, 1e-9);
      expect(light.amount(frame)).toBeCloseTo(Math.exp(-t / 6), 12);
    }
  });

  it("is the same in the basis of its wide Gaussian as in two parts, at an annihilation of nothing", () => {
    const cases: Partial<SimilarProblem>[] = [
      CORE,
      FLAT,
      { ...CORE, ...TURNED },
      { ...CORE, kind: "trace", slit: 0.3 },
      { ...CORE, capture: 0.1, trapLight: 1 },
      { foot: { share: 0.2, ratio: 6 } },
    ];
    for (const each of cases) {
      const parts = similarLight(problem(each));
      const whole = similarLight(problem(each, { annihilation: 1e-9 }));
      for (const frame of [0, 1, 3]) {
        expectLike(
          (r) => at(whole, frame, r, 0),
          (r) => at(parts, frame, r, 0),
          1e-4,
        );
        expect(whole.amount(frame) / parts.amount(frame)).toBeCloseTo(1, 5);
      }
    }
  });

  it("annihilates point by point where nothing moves: n₀/(1 + k n₀ y), with k n₀ at the centre", () => {
    for (const { foot } of [CORE, FLAT]) {
      const { share, ratio } = foot;
      const n0 = (r: number): number =>
        ((1 - share) * Math.exp(-r * r * 5) + (share / ratio) * Math.exp((-r * r * 5) / ratio)) /
        (2 * Math.PI * 0.1);
      const light = similarLight(problem({ foot, diffusion: [0, 0, 0], annihilation: 1.5 }));
      const [frame, t] = [2, 2];
      const y = 6 * -Math.expm1(-t / 6);
      const exact = (r: number): number => (Math.exp(-t / 6) * n0(r)) / (1 + 1.5 * (n0(r) / n0(0)) * y);
      expectLike((r) => at(light, frame, r, 0), exact, 1e-3);
    }
  });

  it("annihilates and spreads as by scipy.integrate.solve_ivp", () => {
    // finite volumes on a radius of 1500 and 3000 cells, BDF with rtol 1e-9, extrapolated; at r = 0, 0.2, 0.45, 0.8 µm
    // after 2 and 6 ns, and all that is left; k n₀ = 1 /ns
    const cases = [
      { ...CORE, after2: [0.24222377, 0.22815819, 0.17713188, 0.08544941], left: [0.47250956, 0.19633551] },
      { ...FLAT, after2: [0.13795622, 0.13457385, 0.1199885, 0.07995548], left: [0.40610507, 0.15576555] },
    ];
    for (const { foot, after2, left } of cases) {
      const light = similarLight(problem({ foot, annihilation: 1 }));
      for (const [k, r] of [0, 0.2, 0.45, 0.8].entries()) {
        expect(Math.abs(at(light, 2, r, 0) - after2[k]!)).toBeLessThan(3e-5 * after2[0]!);
      }
      expect(light.amount(2)).toBeCloseTo(left[0]!, 5);
      expect(light.amount(3)).toBeCloseTo(left[1]!, 5);
    }
  });

  it("carries excitons as far as a Gaussian start does without annihilation, and less far with it", () => {
    const { foot } = CORE;
    const plain = travelled(problem());
    expect(travelled(problem({ foot }))).toBeCloseTo(plain, 12);
    const narrow = travelled(problem({ annihilation: 0.5 }));
    expect(travelled(problem({ foot, annihilation: 1e-9 }))).toBeCloseTo(plain, 6);
    // its foot is thinner than its centre, so that fewer meet
    const footed = travelled(problem({ foot, annihilation: 0.5 }));
    expect(footed).toBeLessThan(plain);
    expect(footed).toBeGreaterThan(narrow);
  });
});
