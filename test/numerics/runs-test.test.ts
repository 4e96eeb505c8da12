import { describe, expect, it } from "vitest";
import { runsTest } from "../../src/numerics/runs-test.ts";

/** Every arrangement of n1 pluses and n2 minuses, counted: the definition itself. */
function byEnumeration(signs: readonly number[]): number {
  const runsOf = (s: readonly number[]) => 1 + s.filter((v, i) => i > 0 && v !== s[i - 1]).length;
  const plus = signs.filter((s) => s > 0).length;
  let all = 0;
  let few = 0;
  for (let bits = 0; bits < 1 << signs.length; bits++) {
    const trial = signs.map((_, i) => (bits & (1 << i) ? 1 : -1));
    if (trial.filter((s) => s > 0).length !== plus) continue;
    all += 1;
    if (runsOf(trial) <= runsOf(signs)) few += 1;
  }
  return few / all;
}

describe("runsTest", () => {
  it.each([
    [[1, 1, 1, 1, 1, -1, -1, -1, -1, -1]],
    [[1, -1, 1, -1, 1, -1, 1, -1]],
    [[1, 1, -1, -1, -1, 1, 1, 1, -1, 1, 1]],
    [[-1, 1, 1, 1, 1, 1, 1, -1]],
  ])("of %j counts the arrangements with as few runs", (signs) => {
    expect(runsTest(signs)).toBeCloseTo(byEnumeration(signs), 12);
  });

  it("is 2/252 for two runs of five (Swed and Eisenhart, Ann. Math. Stat. 14 (1943) 66: 0.008)", () => {
    expect(runsTest([1, 2, 1, 3, 1, -1, -2, -1, -1, -4])).toBeCloseTo(0.008, 3);
  });

  it("comes near the normal approximation for many residuals", () => {
    // 1000 of each sign in 950 runs: mean 1001, variance 2n₁n₂(2n₁n₂ − n)/(n²(n − 1)) ≈ 499.75; from memory.
    const residuals = Array.from({ length: 950 }, (_, run) => {
      const length = run < 100 ? 3 : 2;
      return new Array<number>(length).fill(run % 2 === 0 ? 1 : -1);
    }).flat();
    const p = runsTest(residuals);
    // (950.5 − 1001)/√499.75 = −2.259, Φ = 0.01194.
    expect(p).toBeGreaterThan(0.0115);
    expect(p).toBeLessThan(0.0124);
  });

  it("leaves out residuals of exactly 0, and says 1 where all have one sign", () => {
    expect(runsTest([1, 0, 1, -1, 0, -1])).toBe(runsTest([1, 1, -1, -1]));
    expect(runsTest([1, 2, 3])).toBe(1);
    expect(runsTest([])).toBe(1);
  });
});
