import { describe, expect, it } from "vitest";
import { exposures } from "../../src/field/exposure.ts";

const slow = () => 0.1;

function weightOf(list: readonly { weight: number }[]): number {
  return list.reduce((sum, { weight }) => sum + weight, 0);
}

describe("exposures", () => {
  it("is one instant a frame without a gate, none before the only pulse", () => {
    expect(exposures([-1, 0, 2], 0, null, slow)).toEqual([
      { frame: 1, age: 0, weight: 1 },
      { frame: 2, age: 2, weight: 1 },
    ]);
  });

  it("cuts a gate at the only pulse and leaves the dark part out", () => {
    const list = exposures([-0.5], 2, null, slow);
    expect(weightOf(list)).toBeCloseTo(0.75, 12);
    expect(Math.max(...list.map(({ age }) => age))).toBeLessThan(1.5);
  });

  it("starts afresh where the next pulse falls into a gate", () => {
    const list = exposures([9.5], 1, 10, slow);
    expect(weightOf(list)).toBeCloseTo(1, 12);
    const old = list.filter(({ age }) => age > 9);
    expect(weightOf(old)).toBeCloseTo(0.5, 12);
    for (const { age } of list) expect(age > 9.5 ? age < 10 : age < 0.5).toBe(true);
  });

  it("counts whole periods away before and after the pulse at 0", () => {
    expect(exposures([-3, 23], 0, 10, slow).map(({ frame, age }) => [frame, age])).toEqual([
      [1, 3],
      [0, 7],
    ]);
  });

  it("integrates an exponential of the stated rate over the gate to 2e-7", () => {
    for (const rate of [0.05, 0.4, 1.5, 6]) {
      const list = exposures([1], 1.3, null, () => rate);
      const mean = list.reduce((sum, { age, weight }) => sum + weight * Math.exp(-rate * age), 0);
      const exact = (Math.exp(-rate) * (1 - Math.exp(-1.3 * rate))) / (1.3 * rate);
      expect(Math.abs(mean / exact - 1)).toBeLessThan(2e-7);
    }
  });
});
