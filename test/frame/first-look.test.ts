import { describe, expect, it } from "vitest";
import { firstLook } from "../../src/frame/first-look.ts";
import type { Parameters } from "../../src/frame/kernel.ts";
import type { NoiseLaw } from "../../src/frame/patch.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { COUNTING, draw, pictureOf } from "./pictures.ts";

const SUM_OF_40: NoiseLaw = { excess: 2, floor: 40 * 0.6 };

function expectFound(p: Parameters, width: number, height: number, noise: NoiseLaw, seed: number): void {
  const picture = draw(pictureOf(p, width, height), noise, createRandom(seed));
  const fit = firstLook(p.length === 4 ? "trace" : "map", picture, width, height, noise)!;
  expect(fit.converged).toBe(true);
  for (let j = 0; j < p.length; j++) {
    const u = Math.sqrt(fit.covariance[j * (p.length + 1)]!);
    expect(Math.abs(fit.parameters[j]! - p[j]!) / u).toBeLessThan(4.5);
  }
}

describe("the first look at a bright picture", () => {
  it.each([
    ["in the middle", Float64Array.of(2e5, 31, 33, 16, 2, 20, 8)],
    ["of many photons, sharply peaked", Float64Array.of(5e6, 31.3, 32.8, 6, 0, 6, 8)],
    ["narrower than a pixel", Float64Array.of(1e5, 31.3, 32.8, 1, 0.2, 1.2, 8)],
    ["as wide as a quarter of the picture", Float64Array.of(1e6, 30, 35, 250, 0, 220, 8)],
    ["near the corner", Float64Array.of(2e5, 5.2, 58.3, 16, 0, 16, 8)],
    ["cut by the border", Float64Array.of(2e5, 0.4, 30.3, 25, 0, 25, 8)],
    ["long and thin", Float64Array.of(2e5, 31, 33, 90, 0, 5, 8)],
    ["on a background a hundred times its peak", Float64Array.of(3e5, 31, 33, 16, 0, 16, 3e5)],
    ["on no background", Float64Array.of(2e4, 31, 33, 16, 0, 16, 1e-3)],
  ])("finds a spot %s", (_, p) => {
    expectFound(p, 64, 64, COUNTING, 51);
  });

  it("finds a spot on a camera with negative pixels", () => {
    expectFound(Float64Array.of(3e4, 31, 33, 16, 2, 20, 0.1), 64, 64, SUM_OF_40, 52);
  });

  it("finds the line of a trace", () => {
    expectFound(Float64Array.of(5e4, 70.3, 40, 30), 160, 1, COUNTING, 53);
  });

  it("is not led astray by hot pixels brighter than the spot", () => {
    const p = Float64Array.of(2e5, 31, 33, 16, 2, 20, 8);
    const picture = draw(pictureOf(p, 64, 64), COUNTING, createRandom(54));
    for (const at of [200, 201, 3500]) picture[at]! += 1e5;
    const fit = firstLook("map", picture, 64, 64, COUNTING)!;
    expect(Math.hypot(fit.parameters[1]! - 31, fit.parameters[2]! - 33)).toBeLessThan(0.1);
    expect(fit.parameters[3]! / 16).toBeCloseTo(1, 1);
  });

  it.each([
    [
      "background alone",
      (random: ReturnType<typeof createRandom>) => draw(new Float64Array(4096).fill(50), COUNTING, random),
    ],
    ["zeros", () => new Float64Array(4096)],
    ["one number everywhere", () => new Float64Array(4096).fill(12)],
    ["a single lit pixel", () => Float64Array.from({ length: 4096 }, (_, i) => (i === 2000 ? 1e5 : 10))],
  ])("sees no spot in %s", (_, make) => {
    expect(firstLook("map", make(createRandom(55)), 64, 64, COUNTING)).toBeNull();
  });
});
