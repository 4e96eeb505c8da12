import { describe, expect, it } from "vitest";
import { peakDensity } from "../../src/field/medium.ts";
import { readScenario } from "../../src/field/scenario.ts";
import { expectation } from "../../src/field/synthesise.ts";

describe("a scenario with repulsion", () => {
  const text = (repulsion: number) => `[recording]
frames = 4
width = 24
height = 24
photons = 1e4
[space]
pixel = "0.1 um"
[time]
first = "0 ns"
step = "1 ns"
[motion]
diffusion_coefficient = "0.2 cm^2/s"
sigma0 = "0.3 um"
repulsion = ${repulsion}
[life]
lifetime = "5 ns"`;

  it("has motion.repulsion as by how much of itself D is larger at the peak, and its truth says so", () => {
    const scenario = readScenario(text(0.8), "scenario.toml");
    expect(scenario.medium.repulsion * peakDensity(scenario.start)).toBeCloseTo(0.8, 12);
    const { truth } = expectation(scenario);
    expect(truth.repulsion).toBe(0.8);
    const variances = truth.frames.map(({ variance_um2 }) => variance_um2);
    // faster than 2D, slower than 2D(1 + β/4), which is only the beginning
    const first = (variances[1]! - variances[0]!) / (2 * 0.02);
    expect(first).toBeGreaterThan(1.1);
    expect(first).toBeLessThan(1.2);
  });

  it("is refused below zero and where its value has a slip", () => {
    expect(() => readScenario(text(-1), "scenario.toml")).toThrow(/motion\.repulsion = -1 is below zero/);
    expect(() => readScenario(text(1e4), "scenario.toml")).toThrow(/motion\.repulsion is more than 100/);
  });
});
