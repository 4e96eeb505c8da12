import { describe, expect, it } from "vitest";
import { type Answer, answer, draw, noiseless, prepare } from "./field-stacks.ts";

const DRAWS = 4;
/** χ² of four degrees of freedom lies between these in 99.97 %. */
const [LEAST, MOST] = [0.03, 22];

// a small copy of npm run study:field, with its first seeds: mean stacks by finite differences, from
// scripts/make-field-stacks.py
function answers(name: string): Answer[] {
  const prepared = prepare(name);
  return Array.from({ length: DRAWS }, (_, k) => answer(prepared, draw(prepared, k)));
}

function expectPulls(found: readonly Answer[]): void {
  for (const name of Object.keys(found[0]!.pulls)) {
    const pulls = found.map((each) => each.pulls[name]!);
    const squares = pulls.reduce((sum, pull) => sum + pull * pull, 0);
    expect(squares, name).toBeGreaterThan(LEAST);
    expect(squares, name).toBeLessThan(MOST);
  }
}

describe("the whole-stack fit on the road of the command line, against stacks of another solver", () => {
  it("recovers annihilation with a blurred picture: D, τ, k·n₀, start, centre, light, background and L", () => {
    const found = answers("annihilation");
    expect(found.map((each) => each.preferred)).toEqual(found.map(() => "annihilation"));
    expect(Object.keys(found[0]!.pulls)).toContain("k_n0");
    expectPulls(found);
  });

  it.each(["annihilation-strong", "both", "earlier-pulses-rare", "slit", "amplified"])(
    "is off the truth by less than 2 % of an error bar without noise: %s",
    (name) => {
      const prepared = prepare(name);
      const { pulls } = answer(prepared, noiseless(prepared));
      expect(Object.keys(pulls).length).toBeGreaterThan(6);
      for (const [quantity, pull] of Object.entries(pulls))
        expect(Math.abs(pull), quantity).toBeLessThan(0.02);
    },
  );

  it("recovers capture into traps that let go again", () => {
    const found = answers("capture");
    expect(found.map((each) => each.preferred)).toEqual(found.map(() => "capture"));
    expect(Object.keys(found[0]!.pulls)).toContain("trap_lifetime");
    expectPulls(found);
  });
});
