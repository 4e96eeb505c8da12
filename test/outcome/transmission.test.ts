import { describe, expect, it } from "vitest";
import { erf } from "../../src/numerics/distributions.ts";
import { transmission, transmissionSlope } from "../../src/outcome/transmission.ts";
import type { Acquisition } from "../../src/stack/acquisition.ts";
import { recorded } from "./recordings.ts";

const { acquisition } = recorded({ recording: { frames: 3 } }).stack;
const behind = (width: number | null, emissionOrder: 1 | 2): Acquisition => ({
  ...acquisition,
  slit: width === null ? null : { width: { value: width, u: 0 } },
  sample: { ...acquisition.sample, emissionOrder },
});
const modelsOf = (variances: readonly (readonly number[])[]) => ({
  light: () => 1,
  variance: (i: number) => variances[i]!,
  centre: (): [number, number] => [0, 0],
  background: () => 0,
});
const of = (a: Acquisition, kind: "map" | "trace", variances: readonly (readonly number[])[]) =>
  transmission(
    a,
    kind,
    modelsOf(variances),
    variances.map((_, i) => i),
  );

describe("the light that arrives", () => {
  it("is all of it on a map of excitons and on a trace without a slit", () => {
    expect(of(behind(null, 1), "map", [[1, 0, 1]])).toBeNull();
    expect(of(behind(null, 1), "trace", [[1]])).toBeNull();
  });

  it("behind a slit is the part of a Gaussian within ± w/2", () => {
    // σ = 0.5 µm, w = 1 µm: one standard deviation to each side, 68.27 %
    expect(of(behind(1, 1), "trace", [[0.25]])![0]).toBeCloseTo(0.6827, 4);
  });

  it("of squared density fades as √|Σ| grows", () => {
    const variances = [
      [0.2, 0.05, 0.3],
      [0.4, 0.02, 0.5],
    ];
    const found = of(behind(null, 2), "map", variances)!;
    expect(found[1]! / found[0]!).toBeCloseTo(Math.sqrt((0.06 - 0.0025) / (0.2 - 0.0004)), 12);
  });

  it.each([
    ["a map of squared density", behind(null, 2), "map", [0.2, 0.05, 0.3]],
    ["a trace behind a slit", behind(0.3, 1), "trace", [0.2]],
    ["a trace of squared density behind a slit", behind(0.8, 2), "trace", [0.2]],
    ["a trace of squared density", behind(null, 2), "trace", [0.2]],
  ] as const)("has the slope of its logarithm by central differences: %s", (_, a, kind, variance) => {
    transmissionSlope(a, kind, variance).forEach((slope, k) => {
      const moved = (by: number) => variance.map((v, j) => (j === k ? v + by : v));
      const h = 1e-6;
      // the first frame is the reference and stays
      const at = (by: number) => Math.log(of(a, kind, [variance, moved(by)])![1]!);
      expect(slope).toBeCloseTo((at(h) - at(-h)) / (2 * h), 5);
    });
  });

  it("follows erf(w/(2√2·σ)) for a wide slit too", () => {
    expect(of(behind(4, 1), "trace", [[0.25]])![0]).toBeCloseTo(erf(4 / (2 * Math.SQRT2 * 0.5)), 14);
  });
});
