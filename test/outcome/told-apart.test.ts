import { describe, expect, it } from "vitest";
import type { CandidateFit } from "../../src/field/stack-fit/candidates.ts";
import { CANDIDATES, type Name } from "../../src/field/stack-fit/parameters.ts";
import type { Range, Ranged } from "../../src/outcome/field-intervals.ts";
import { notToldApart } from "../../src/outcome/told-apart.ts";

const NAMES: readonly Name[] = ["amplitude", "D", "tau", "capture"];

/** A fit of unit variances with one correlation. */
function fitted(a: Name, b: Name, r: number): CandidateFit {
  const covariance = Float64Array.from({ length: 16 }, (_, k) => (k % 5 === 0 ? 1 : 0));
  const [i, j] = [NAMES.indexOf(a), NAMES.indexOf(b)];
  covariance[4 * i + j] = r;
  covariance[4 * j + i] = r;
  return {
    candidate: CANDIDATES.find(({ name }) => name === "capture")!,
    names: NAMES,
    parameters: Float64Array.of(1e4, 0.02, 5, 0.1),
    covariance,
    deviance: 0,
    converged: true,
    reason: "a maximum was reached",
    iterations: 3,
    held: [],
    goodness: { chi2: 50, degreesOfFreedom: 50, pValue: 0.5 },
    aicc: 0,
    weight: 1,
  };
}

const NONE: ReadonlyMap<Ranged, Range> = new Map();
const range = (low: number | null, high: number | null): Range => ({ ends: [low, high], profiled: true });

describe("notToldApart", () => {
  it("names a pair of quoted parameters whose correlation is beyond 0.95, and no lesser one", () => {
    const [note] = notToldApart(fitted("tau", "capture", -0.97), NONE);
    expect(note?.level).toBe("note");
    expect(note?.text).toBe("the whole-stack fit cannot tell apart τ and the rate of capture (r = −0.97)");
    expect(notToldApart(fitted("tau", "capture", 0.94), NONE)).toEqual([]);
  });

  it("leaves out light and place, which nobody quotes", () => {
    expect(notToldApart(fitted("amplitude", "capture", 0.99), NONE)).toEqual([]);
  });

  it("says which end of an interval the data do not set", () => {
    const ranges = new Map([
      ["trap_lifetime", range(12, null)],
      ["capture", range(null, 0.1)],
    ] as const);
    expect(notToldApart(fitted("tau", "capture", 0), ranges)[0]?.text).toBe(
      "the whole-stack fit finds that the lifetime in traps is not determined from above; it finds that the rate of capture is not determined from below",
    );
  });

  it("has nothing to say of a fit that did not come to rest", () => {
    expect(notToldApart({ ...fitted("tau", "capture", 0.99), converged: false }, NONE)).toEqual([]);
  });
});
