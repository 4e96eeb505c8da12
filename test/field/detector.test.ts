import { describe, expect, it } from "vitest";
import { record } from "../../src/field/detector.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { PHOTON_COUNTING } from "../../src/stack/defaults.ts";

const PIXELS = 40_000;

function meanAndVariance(counts: ArrayLike<number>): { mean: number; variance: number } {
  const values = Array.from(counts);
  const mean = values.reduce((sum, c) => sum + c, 0) / values.length;
  return { mean, variance: values.reduce((sum, c) => sum + (c - mean) ** 2, 0) / (values.length - 1) };
}

describe("record", () => {
  it("counts photons with variance equal to the mean", () => {
    const { mean, variance } = meanAndVariance(
      record(new Float64Array(PIXELS).fill(3.7), PHOTON_COUNTING, createRandom(1)),
    );
    // four standard errors: √(λ/n) of the mean, λ√(2/n) and a little more of the variance
    expect(Math.abs(mean - 3.7)).toBeLessThan(4 * Math.sqrt(3.7 / PIXELS));
    expect(Math.abs(variance - 3.7)).toBeLessThan(4 * 3.7 * Math.sqrt(2.3 / PIXELS));
  });

  it.each([
    [2, 5],
    [1.5, 40],
    [2, 300],
  ])("gives an amplified camera the variance F·g²·λ + read² + 1/12: F = %d, λ = %d", (excessNoise, light) => {
    const detector = { offset: 100, gain: 8, readNoise: 6, excessNoise, saturation: null };
    const { mean, variance } = meanAndVariance(
      record(new Float64Array(PIXELS).fill(light), detector, createRandom(7)),
    );
    const expected = excessNoise * 64 * light + 36 + 1 / 12;
    expect(Math.abs(mean - (100 + 8 * light))).toBeLessThan(4 * Math.sqrt(expected / PIXELS));
    expect(Math.abs(variance / expected - 1)).toBeLessThan(4 * Math.sqrt((2 + 6 / light) / PIXELS));
  });

  it("fills up at the saturation and never falls below zero", () => {
    const detector = { offset: 3, gain: 8, readNoise: 6, excessNoise: 1, saturation: 500 };
    const bright = record(new Float64Array(500).fill(1000), detector, createRandom(2));
    expect(new Set(bright)).toEqual(new Set([500]));
    const dark = record(new Float64Array(500), detector, createRandom(2));
    expect(Math.min(...dark)).toBe(0);
    expect(Math.max(...dark)).toBeGreaterThan(3);
  });
});
