import { describe, expect, it } from "vitest";
import { pull, recorded, resultOf } from "./recordings.ts";

const spreadOf = (pulls: readonly number[]) => {
  const mean = pulls.reduce((a, b) => a + b, 0) / pulls.length;
  return { mean, sd: Math.sqrt(pulls.reduce((a, b) => a + (b - mean) ** 2, 0) / (pulls.length - 1)) };
};

describe("a recording of so little light that frames hold a few photons", () => {
  const runs = Array.from({ length: 24 }, (_, seed) => {
    const { stack, truth } = recorded({ recording: { photons: 60, background: 0, frames: 60 } }, 500 + seed);
    const { quantities } = resultOf(stack);
    return {
      d: pull(quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s),
      tau: pull(quantities.lifetime!, truth.lifetime_ns),
    };
  });

  it("gives D within its uncertainty", () => {
    const { mean, sd } = spreadOf(runs.map((run) => run.d));
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(24));
    expect(sd).toBeLessThan(1.7);
  });

  it("gives τ within its uncertainty", () => {
    const { mean, sd } = spreadOf(runs.map((run) => run.tau));
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(24));
    expect(sd).toBeLessThan(1.7);
  });
});

describe("frames without a single photon", () => {
  it("count in the decay where their neighbours hold a few", () => {
    const { stack } = recorded({ recording: { photons: 60, background: 0, frames: 100 } }, 7);
    const { frames } = resultOf(stack);
    const zeros = frames.filter((frame) => {
      const data = new Float64Array(stack.width * stack.height);
      stack.read(frame.index, data);
      return data.every((value) => value === 0);
    });
    expect(zeros.length).toBeGreaterThan(5);
    for (const frame of zeros) {
      expect(frame.flags).not.toContain("empty");
      expect(frame.used_in_decay).toBe(true);
    }
  });
});
