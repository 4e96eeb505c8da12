import { describe, expect, it } from "vitest";
import { fitPatch } from "../../src/frame/fit-spot.ts";
import type { Parameters } from "../../src/frame/kernel.ts";
import type { NoiseLaw, Patch } from "../../src/frame/patch.ts";
import { fitLeastSquares } from "../../src/numerics/least-squares.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { CAMERA, COUNTING, draw, kindOf, meanOf, pictureOf, wholePatch } from "./pictures.ts";

/** The same optimum by ml-levenberg-marquardt, weights taken anew from the prediction until they settle. */
function byLibrary(patch: Patch, start: Parameters, noise: NoiseLaw) {
  const { width } = patch.rectangle;
  return fitLeastSquares({
    prediction: (p) => pictureOf(p, width, patch.data.length / width),
    y: patch.data,
    sigma: (prediction) =>
      prediction.map((mean) => Math.sqrt(noise.excess * Math.max(mean, 0) + noise.floor)),
    start: Array.from(start),
  });
}

const bright = Float64Array.of(60_000, 14.3, 11.6, 8, 0.6, 6, 2);
const dim = Float64Array.of(250, 13.7, 12.4, 7, 0.8, 8, 0.4);
const turned = Float64Array.of(5000, 14.3, 11.6, 12, 6, 9, 0.7);
const trace = Float64Array.of(2500, 31.4, 18, 1.5);

const frames: [string, Parameters, NoiseLaw][] = [
  ["a bright spot", bright, COUNTING],
  ["250 photons", dim, COUNTING],
  ["a turned spot", turned, COUNTING],
  ["a turned spot on an amplified camera", turned, CAMERA],
  ["a trace", trace, COUNTING],
  ["a trace on an amplified camera", trace, CAMERA],
];

function frameOf(truth: Parameters, noise: NoiseLaw, seed: number): Patch {
  return kindOf(truth) === "trace"
    ? wholePatch(draw(pictureOf(truth, 64), noise, createRandom(seed)), 64)
    : wholePatch(draw(pictureOf(truth, 30, 24), noise, createRandom(seed)), 30, 24);
}

describe("the spot of one frame", () => {
  it.each(frames)("is the optimum of ml-levenberg-marquardt to 1e-6: %s", (_, truth, noise) => {
    const patch = frameOf(truth, noise, 11);
    const fit = fitPatch(kindOf(truth), patch, truth, noise);
    const library = byLibrary(patch, truth, noise);
    expect(fit.converged).toBe(true);
    expect(library.converged).toBe(true);
    const n = truth.length;
    for (let j = 0; j < n; j++) {
      expect(Math.abs(fit.parameters[j]! / library.parameters[j]! - 1)).toBeLessThan(1e-6);
      expect(Math.abs(Math.sqrt(fit.covariance[j * (n + 1)]!) / library.standardErrors[j]! - 1)).toBeLessThan(
        1e-5,
      );
    }
  });

  it("scatters as its uncertainties say, about the truth", () => {
    const n = 7;
    const pulls = Array.from({ length: 100 }, (_, seed) => {
      const { parameters, covariance } = fitPatch("map", frameOf(turned, CAMERA, 200 + seed), turned, CAMERA);
      return Array.from(parameters, (p, j) => (p - turned[j]!) / Math.sqrt(covariance[j * (n + 1)]!));
    });
    for (let j = 0; j < n; j++) {
      const mean = pulls.reduce((sum, pull) => sum + pull[j]!, 0) / 100;
      const variance = pulls.reduce((sum, pull) => sum + (pull[j]! - mean) ** 2, 0) / 99;
      // four standard errors of a mean and of a variance of 100 normal draws
      expect(Math.abs(mean)).toBeLessThan(0.4);
      expect(Math.abs(variance - 1)).toBeLessThan(0.57);
    }
  });

  it.each([
    ["three widths beside the spot", Float64Array.of(3000, 23, 16, 10, 0, 10, 1)],
    ["five times too wide", Float64Array.of(5000, 14, 12, 55, 0, 50, 1)],
    ["ten times too narrow", Float64Array.of(5000, 14, 12, 1, 0, 1, 1)],
    ["a hundred times too faint", Float64Array.of(50, 14, 12, 10, 0, 10, 1)],
    ["on a background far too high", Float64Array.of(5000, 14, 12, 10, 0, 10, 40)],
    ["without any background", Float64Array.of(5000, 14, 12, 10, 0, 10, 0)],
  ])("is found from a start %s", (_, start) => {
    const patch = frameOf(turned, COUNTING, 12);
    const near = fitPatch("map", patch, turned, COUNTING);
    const far = fitPatch("map", patch, start, COUNTING);
    expect(far.converged).toBe(true);
    for (let j = 0; j < 7; j++) {
      const u = Math.sqrt(near.covariance[j * 8]!);
      expect(Math.abs(far.parameters[j]! - near.parameters[j]!) / u).toBeLessThan(1e-4);
    }
  });

  it("is found in every one of 300 wide and faint frames, where full steps overshoot back and forth", () => {
    const p = Float64Array.of(390, 39, 39, 66, 0, 66, 0.3);
    const mean = pictureOf(p, 79, 79);
    for (let seed = 400; seed < 700; seed++) {
      const fit = fitPatch("map", wholePatch(draw(mean, COUNTING, createRandom(seed)), 79, 79), p, COUNTING);
      expect(fit.converged).toBe(true);
      expect(fit.iterations).toBeLessThan(22);
    }
  });

  it("is found where the top is flat and next to no background holds the tails", () => {
    const p = Float64Array.of(130_000, 39, 39, 42, 0, 42, 0);
    const gaussian = pictureOf(p, 79, 79);
    const flat = gaussian.map((g) => g * (1 - (0.25 * g) / gaussian[39 * 79 + 39]!) + 0.002);
    const start = Float64Array.of(120_000, 39.2, 38.9, 45, 0, 45, 0.05);
    const fit = fitPatch("map", wholePatch(draw(flat, COUNTING, createRandom(16)), 79, 79), start, COUNTING);
    expect(fit.converged).toBe(true);
    expect(fit.iterations).toBeLessThan(22);
  });

  it("is no spot where the frame holds background alone, and nothing is thrown", () => {
    for (let seed = 0; seed < 20; seed++) {
      const mean = new Float64Array(30 * 24).fill(1);
      const patch = wholePatch(draw(mean, COUNTING, createRandom(300 + seed)), 30, 24);
      const { parameters, covariance, converged } = fitPatch("map", patch, turned, COUNTING);
      const significant = parameters[0]! > 5 * Math.sqrt(covariance[0]!);
      expect(converged && significant).toBe(false);
    }
  });

  it.each([
    ["zeros", 0],
    ["one number", 7],
  ])("is no spot in a frame of %s", (_, value) => {
    const patch = wholePatch(new Float64Array(30 * 24).fill(value), 30, 24);
    const { parameters, covariance, converged } = fitPatch("map", patch, turned, COUNTING);
    expect(converged && parameters[0]! > 5 * Math.sqrt(covariance[0]!)).toBe(false);
  });

  it("stands on the bound where photon counting wants a background below zero", () => {
    const p = Float64Array.of(2000, 14.3, 11.6, 8, 0.6, 6, 0);
    const patch = frameOf(p, COUNTING, 13);
    const fit = fitPatch("map", patch, Float64Array.of(1500, 14, 12, 9, 0, 9, 0.5), COUNTING);
    expect(fit.converged).toBe(true);
    expect(fit.parameters[6]!).toBeLessThan(1e-3);
    // without background the maximum likelihood of a Gaussian is its number, mean and second moments
    const total = patch.data.reduce((sum, value) => sum + value, 0);
    const moment = (f: (x: number, y: number) => number) =>
      patch.data.reduce((sum, value, i) => sum + value * f(i % 30, Math.floor(i / 30)), 0) / total;
    const [x, y] = [moment((x) => x), moment((_, y) => y)];
    const moments = [
      total,
      x,
      y,
      moment((i) => (i - x) ** 2),
      moment((i, j) => (i - x) * (j - y)),
      moment((_, j) => (j - y) ** 2),
    ];
    for (const [j, value] of moments.entries()) {
      expect(Math.abs(fit.parameters[j]! - value)).toBeLessThan(2e-3 * Math.sqrt(fit.covariance[j * 8]!));
    }
  });

  it("takes negative photons of a camera's read noise and a background below zero", () => {
    const p = Float64Array.of(3000, 14.3, 11.6, 8, 0.6, 6, -0.5);
    const mean = pictureOf(p, 30, 24);
    const random = createRandom(14);
    const data = mean.map((light) => random.poisson(Math.max(light + 0.5, 0)) - 0.5 + 2 * random.normal());
    const fit = fitPatch("map", wholePatch(data, 30, 24), Float64Array.of(2000, 14, 12, 9, 0, 9, 0), {
      excess: 1,
      floor: 4,
    });
    expect(fit.converged).toBe(true);
    expect(Math.abs(fit.parameters[6]! + 0.5)).toBeLessThan(4 * Math.sqrt(fit.covariance[48]!));
    expect(meanOf(fit.parameters, 0, 0)).toBeLessThan(0);
  });

  it("leaves the start as it was", () => {
    const start = turned.slice();
    fitPatch("map", frameOf(turned, COUNTING, 15), start, COUNTING);
    expect(start).toEqual(turned);
  });
});
