import { describe, expect, it } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import { codesOf, recorded, resultOf } from "./recordings.ts";

describe("a spot that stands still", () => {
  it.each([1, 2, 3, 4])("has a D within two u of zero, no motion and L as a limit (draw %i)", (seed) => {
    const { stack } = recorded({ motion: { diffusion_coefficient: "0 cm^2/s" } }, seed);
    const result = resultOf(stack);
    const { diffusion_coefficient: d, diffusion_length: length } = result.quantities;
    expect(Math.abs(d.value)).toBeLessThan(2 * d.u);
    expect(codesOf(result)).toContain("no-motion-detected");
    expect(length!.upper_limit).toBe(true);
    expect(length!.interval95).toEqual([0, length!.value]);
    expect(result.lengths).toEqual([]);
  });

  it("has a limit of L of √((L² + 1.645·u(L²))), L² = Dτ and never below zero", () => {
    for (const seed of [1, 3]) {
      const { stack } = recorded({ motion: { diffusion_coefficient: "0 cm^2/s" } }, seed);
      const { diffusion_coefficient: d, lifetime, diffusion_length } = resultOf(stack).quantities;
      const square = (Math.max(d.value, 0) + 1.6448536 * d.u) * (lifetime!.value / 10);
      // u of τ, a third of a per cent of a D of nothing, is left out here
      expect(diffusion_length!.value / Math.sqrt(square)).toBeCloseTo(1, 2);
    }
  });
});

describe("what is not plain diffusion", () => {
  it("strong annihilation is not sound, and suspected by name", () => {
    const { stack } = recorded({ recording: { photons: 3e5 }, life: { annihilation: "3 /ns" } });
    const result = resultOf(stack);
    expect(result.verdict.level).not.toBe("sound");
    expect(codesOf(result)).toContain("annihilation-suspected");
    expect(codesOf(result)).not.toContain("traps-suspected");
  });

  it("strong capture into traps is not sound, and suspected by name", () => {
    const { stack } = recorded({
      recording: { photons: 3e5 },
      life: { capture: "0.8 /ns", trap_light: 1, trap_lifetime: "20 ns" },
    });
    const result = resultOf(stack);
    expect(result.verdict.level).not.toBe("sound");
    expect(codesOf(result)).toContain("traps-suspected");
    expect(codesOf(result)).not.toContain("annihilation-suspected");
  });

  it("a glow of earlier pulses is said where no period is given", () => {
    const { stack } = recorded(
      { recording: { frames: 34 }, time: { first: "-1.2 ns" }, excitation: { period: "15 ns" } },
      1,
      (acquisition) => ({ ...acquisition, period: null }),
    );
    expect(codesOf(resultOf(stack))).toContain("earlier-pulses-glow");
  });

  it("with the period given the lifetime is that of the truth", () => {
    const { stack, truth } = recorded({
      recording: { frames: 34 },
      time: { first: "-1.2 ns" },
      excitation: { period: "15 ns" },
    });
    const { lifetime } = resultOf(stack).quantities;
    expect(Math.abs(lifetime!.value - truth.lifetime_ns)).toBeLessThan(4 * lifetime!.u);
  });

  it("a spot near the border of the picture is cut off", () => {
    const { stack } = recorded({ motion: { centre_x: "0.3 um" } });
    const result = resultOf(stack);
    expect(result.verdict.level).toBe("unsound");
    expect(codesOf(result)).toContain("spot-cut-off");
  });

  it("a detector that scatters twice as much as stated is told", () => {
    const { stack } = recorded(
      { detector: { offset: 100, gain: 8, read_noise: 4, excess_noise: 2 } },
      1,
      (a) => ({
        ...a,
        detector: { ...a.detector, excessNoise: 1 },
      }),
    );
    const result = resultOf(stack);
    expect(result.verdict.level).not.toBe("sound");
    expect(codesOf(result)).toContain("noise-not-as-stated");
  });

  it("a tilted background is told", () => {
    const { stack } = recorded({
      recording: { background: 3 },
      motion: { sigma0: "0.2 um", diffusion_coefficient: "0.05 cm^2/s" },
    });
    const random = createRandom(5);
    const { width, height, acquisition } = stack;
    const frames = Array.from({ length: stack.frames }, (_, i) => {
      const data = new Float64Array(width * height);
      stack.read(i, data);
      return data.map((value, at) => value + random.poisson((2 * (at % width)) / width));
    });
    expect(codesOf(resultOf(memoryStack({ frames, width, height, acquisition })))).toContain(
      "background-not-flat",
    );
  });

  it("background without a spot is refused in one sentence", () => {
    const { stack } = recorded();
    const random = createRandom(6);
    const { width, height, acquisition } = stack;
    const frames = Array.from({ length: stack.frames }, () =>
      Float64Array.from({ length: width * height }, () => random.poisson(2)),
    );
    expect(() => resultOf(memoryStack({ frames, width, height, acquisition }))).toThrow(
      /no spot stands out of the background/,
    );
  });
});
