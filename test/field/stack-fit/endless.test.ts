import { describe, expect, it } from "vitest";
import { endlessLifetime, holding } from "../../../src/field/stack-fit/endless.ts";
import { fitStack } from "../../../src/field/stack-fit/fit-stack.ts";
import { CANDIDATES, namesOf } from "../../../src/field/stack-fit/parameters.ts";
import { drawnStacks, TRUTH } from "./drawn-stack.ts";

const names = namesOf("map", CANDIDATES.find(({ name }) => name === "capture")!, {
  start: "round",
  diffusion: "isotropic",
});
const { draw, start } = drawnStacks('capture = "0.15 /ns"\ntrap_light = 1\ntrap_lifetime = "50 us"', 3e4);

describe("a lifetime in traps that a recording sees no end of", () => {
  it("is a hundred times the recording, and has no end where earlier pulses' traps shine", () => {
    const data = draw(11);
    // 16 frames 0.6 ns apart
    expect(endlessLifetime(data)).toBeCloseTo(900, 9);
    expect(endlessLifetime({ ...data, period: 20 })).toBe(Number.POSITIVE_INFINITY);
  });

  it("leaves the fit determined in everything else: held at its end in about every other draw", () => {
    const fits = [11, 12, 13, 14].map((seed) =>
      fitStack(draw(seed), names, { ...start, capture: 0.06, trap_lifetime: 8 }),
    );
    expect(fits.map(({ converged }) => converged)).toEqual([true, true, true, true]);
    expect(new Set(fits.flatMap(({ held }) => held))).toEqual(new Set(["trap_lifetime"]));
    const truth = { ...TRUTH, amplitude: 3e4, capture: 0.15 };
    for (const { parameters, covariance } of fits) {
      for (const [name, value] of Object.entries(truth)) {
        const i = (names as readonly string[]).indexOf(name);
        const u = Math.sqrt(covariance[i * names.length + i]!);
        expect(Math.abs(parameters[i]! - value)).toBeLessThan(4 * u);
      }
    }
  });

  it("takes no part in a step: no score, no coupling, unit information", () => {
    const score = Float64Array.of(1, 2);
    const information = Float64Array.of(4, 3, 3, 5);
    expect(holding({ score, information }, 1)).toEqual({
      score: Float64Array.of(1, 0),
      information: Float64Array.of(4, 0, 0, 1),
    });
  });
});
