import { describe, expect, it } from "vitest";
import { fitStack } from "../../../src/field/stack-fit/fit-stack.ts";
import { heldFit } from "../../../src/field/stack-fit/held-fit.ts";
import { CANDIDATES, type Candidate, namesOf } from "../../../src/field/stack-fit/parameters.ts";
import { drawnStacks } from "./drawn-stack.ts";

const ROUND = { start: "round", diffusion: "isotropic" } as const;
const namesFor = (name: Candidate["name"]) =>
  namesOf("map", CANDIDATES.find((each) => each.name === name)!, ROUND);

describe("heldFit", () => {
  const { draw, start } = drawnStacks('annihilation = "0.3 /ns"', 1e4);
  const data = draw(7);
  const plain = fitStack(data, namesFor("diffusion"), start);

  it("with a rate held at zero is the fit without it, found by the other routine", () => {
    const names = namesFor("annihilation");
    const fit = fitStack(data, names, { ...start, k_n0: 0.3 });
    const held = heldFit(
      data,
      fit,
      names.map((name) => (name === "k_n0" ? 1 : 0)),
    );
    const loss = plain.deviance - fit.deviance;
    expect(loss).toBeGreaterThan(10);
    expect(Math.abs((held.rise(0) ?? Number.NaN) - loss)).toBeLessThan(0.05);
  });

  it("never rises more than along its line, and much as a parabola where much light determines all", () => {
    const names = namesFor("diffusion");
    const held = heldFit(
      data,
      plain,
      names.map((name) => (name === "D" ? 1 : 0)),
    );
    for (const side of [-2, 2]) {
      const x = held.value + side * held.u;
      const rise = held.rise(x) ?? Number.NaN;
      expect(rise).toBeLessThan((held.riseAlong(x) ?? Number.NaN) + 0.01);
      expect(Math.abs(rise - 4)).toBeLessThan(0.3);
    }
  });
});
