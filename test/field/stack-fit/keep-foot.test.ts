import { describe, expect, it } from "vitest";
import { keepFoot } from "../../../src/field/stack-fit/keep-foot.ts";
import type { Name } from "../../../src/field/stack-fit/parameters.ts";

const NAMES: readonly Name[] = ["tau", "foot_share", "foot_ratio"];

function kept(from: [number, number], to: [number, number]): number[] {
  const p = Float64Array.of(5, ...to);
  keepFoot(NAMES, Float64Array.of(5, ...from), p);
  return [...p.subarray(1)];
}

describe("keepFoot", () => {
  it("keeps a share of the foot between none and all, and a flat top one with light at its centre", () => {
    expect(kept([0.1, 3], [-0.4, 3])).toEqual([0, 3]);
    expect(kept([0.9, 3], [1.4, 3])).toEqual([1, 3]);
    expect(kept([1.1, 3], [0.7, 3])).toEqual([1, 3]);
    // the density at the centre is zero at a share of 3/(3 − 1)
    expect(kept([1.4, 3], [1.6, 3])[0]).toBeLessThan(1.5);
  });

  it("takes a share by a quarter and a ratio by a factor of 1.6 at most in one step", () => {
    expect(kept([0.2, 4], [0.9, 40])).toEqual([0.45, 6.4]);
    expect(kept([0.2, 4], [0.2, 0.1])).toEqual([0.2, 2.5]);
  });

  it("leaves a start without a foot alone", () => {
    const p = Float64Array.of(5);
    keepFoot(["tau"], Float64Array.of(4), p);
    expect([...p]).toEqual([5]);
  });
});
