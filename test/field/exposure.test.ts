import { describe, expect, it } from "vitest";
import { exposures, type Timing } from "../../src/field/exposure.ts";
import { erf } from "../../src/numerics/distributions.ts";

const slow = () => 0.1;

function timing(delays: number[], gate: number, period: number | null, responseSigma = 0): Timing {
  return { delays, gate, period, responseSigma };
}

function weightOf(list: readonly { weight: number }[]): number {
  return list.reduce((sum, { weight }) => sum + weight, 0);
}

describe("exposures", () => {
  it("is one instant a frame without a gate, none before the only pulse", () => {
    expect(exposures(timing([-1, 0, 2], 0, null), slow)).toEqual([
      { frame: 1, age: 0, weight: 1 },
      { frame: 2, age: 2, weight: 1 },
    ]);
  });

  it("cuts a gate at the only pulse and leaves the dark part out", () => {
    const list = exposures(timing([-0.5], 2, null), slow);
    expect(weightOf(list)).toBeCloseTo(0.75, 12);
    expect(Math.max(...list.map(({ age }) => age))).toBeLessThan(1.5);
  });

  it("starts afresh where the next pulse falls into a gate", () => {
    const list = exposures(timing([9.5], 1, 10), slow);
    expect(weightOf(list)).toBeCloseTo(1, 12);
    const old = list.filter(({ age }) => age > 9);
    expect(weightOf(old)).toBeCloseTo(0.5, 12);
    for (const { age } of list) expect(age > 9.5 ? age < 10 : age < 0.5).toBe(true);
  });

  it("counts whole periods away before and after the pulse at 0", () => {
    expect(exposures(timing([-3, 23], 0, 10), slow).map(({ frame, age }) => [frame, age])).toEqual([
      [1, 3],
      [0, 7],
    ]);
  });

  it("integrates an exponential of the stated rate over the gate to 2e-7", () => {
    for (const rate of [0.05, 0.4, 1.5, 6]) {
      const list = exposures(timing([1], 1.3, null), () => rate);
      const mean = list.reduce((sum, { age, weight }) => sum + weight * Math.exp(-rate * age), 0);
      const exact = (Math.exp(-rate) * (1 - Math.exp(-1.3 * rate))) / (1.3 * rate);
      expect(Math.abs(mean / exact - 1)).toBeLessThan(2e-7);
    }
  });

  it.each([
    [1, 0],
    [0.05, 0],
    [-0.1, 0],
    [0.3, 0.2],
    [-0.4, 5],
  ])("smears an exponential by a Gaussian response: gate opening at %d ns, %d ns long", (delay, gate) => {
    const [s, tau] = [0.12, 2];
    const list = exposures(timing([delay], gate, null, s), () => 1 / tau);
    const mean = list.reduce((sum, { age, weight }) => sum + weight * Math.exp(-age / tau), 0);
    // exp(−t/τ) from t = 0 on, convolved: ½ exp(s²/2τ² − t/τ)·erfc((s/τ − t/s)/√2), and its mean over the gate by
    // many midpoints
    const smeared = (t: number) =>
      0.5 * Math.exp((s * s) / (2 * tau * tau) - t / tau) * (1 - erf((s / tau - t / s) / Math.SQRT2));
    const points = gate === 0 ? 1 : 20_000;
    let exact = 0;
    for (let i = 0; i < points; i++) exact += smeared(delay + ((i + 0.5) / points) * gate) / points;
    expect(Math.abs(mean - exact)).toBeLessThan(1e-7);
  });
});
