import { describe, expect, it } from "vitest";
import type { Name, Values } from "../../../src/field/stack-fit/parameters.ts";
import { quasiDeviance } from "../../../src/field/stack-fit/ring-score.ts";
import { ringSums, SUMS, slopeOverRadius } from "../../../src/field/stack-fit/ring-sums.ts";
import { deviance, scoreStack } from "../../../src/field/stack-fit/score-stack.ts";
import type { StackData } from "../../../src/field/stack-fit/stack-data.ts";
import { createRandom } from "../../../src/numerics/random.ts";

const PIXEL = 0.2;
const CENTRE = [2.03, 1.87] as const;
const WIDTH = 21;
const HEIGHT = 19;

/** Counts of two frames with a struck pixel set aside and some pixels pooled. */
function data(noise: StackData["noise"]): StackData {
  const random = createRandom(5);
  const frame = (k: number) => ({
    frame: k,
    delay: 0.7 * k,
    shift: [0.02 * k, -0.01 * k] as const,
    background: 0.1 * k,
    variance: 0.16 + 0.04 * k,
    patch: {
      rectangle: { x0: 0, y0: 0, width: WIDTH, height: HEIGHT },
      data: Float32Array.from({ length: WIDTH * HEIGHT }, (_, i) => {
        const dx = (i % WIDTH) * PIXEL - CENTRE[0];
        const dy = Math.floor(i / WIDTH) * PIXEL - CENTRE[1];
        return random.poisson(60 * Math.exp(-(dx * dx + dy * dy) / 0.35) + 0.5);
      }),
      outerCount: 300,
      outerSum: 160,
      excluded: [47],
    },
  });
  return {
    kind: "map",
    pixel: PIXEL,
    noise,
    frames: [frame(0), frame(1)],
    gate: 0.2,
    responseSigma: 0,
    period: null,
    slit: null,
    blurVariance: 0.02,
  };
}

const COUNTING = { excess: 1, floor: 0 };
const AMPLIFIED = { excess: 2, floor: 2.8 };

describe("ringSums", () => {
  it("gives sums over pixels of an even function of the distance, weighted by photons and by x and y", () => {
    const stack = data(COUNTING);
    const { step, frames } = ringSums(stack, ...CENTRE);
    const f = (r: number): number => Math.exp(-r * r) + 0.3 * Math.cos(2 * r);
    for (const [k, { count, sums }] of frames.entries()) {
      const direct = new Float64Array(SUMS);
      const { patch, shift } = stack.frames[k]!;
      patch.data.forEach((d, i) => {
        if (patch.excluded.includes(i)) return;
        const x = (i % WIDTH) * PIXEL - CENTRE[0] - shift[0];
        const y = Math.floor(i / WIDTH) * PIXEL - CENTRE[1] - shift[1];
        const value = f(Math.hypot(x, y));
        [1, x, y, x * x, x * y, y * y, d, x * d, y * d].forEach((each, m) => {
          direct[m]! += value * each;
        });
      });
      for (let m = 0; m < SUMS; m++) {
        let onRings = 0;
        for (let j = 0; j < count; j++) onRings += f(j * step) * sums[j * SUMS + m]!;
        expect(Math.abs(onRings - direct[m]!)).toBeLessThan(1e-5 * Math.max(1, Math.abs(direct[m]!)));
      }
    }
  });
});

describe("slopeOverRadius", () => {
  it("is −e^(−r²/2) for e^(−r²/2), at the centre too", () => {
    const step = 0.08;
    const profile = Float64Array.from({ length: 60 }, (_, j) => Math.exp(-0.5 * (j * step) ** 2));
    const out = new Float64Array(60);
    slopeOverRadius(profile, 60, step, out);
    for (let j = 0; j < 57; j++) expect(out[j]).toBeCloseTo(-profile[j]!, 6);
  });
});

describe("deviance and score on rings", () => {
  const names: Name[] = ["amplitude", "x", "y", "s", "D", "tau", "background", "k_n0"];
  const v: Values = {
    amplitude: 1500,
    x: 2.03,
    y: 1.87,
    s: 0.16,
    D: 0.03,
    tau: 5,
    background: 0.5,
    k_n0: 0.5,
  };
  const p = Float64Array.from(names, (name) => v[name]!);

  it("differ between parameters as the sum over pixels one by one does, for counted and for amplified light", () => {
    for (const noise of [COUNTING, AMPLIFIED]) {
      const stack = data(noise);
      const byPixels = (q: Float64Array): number => deviance(stack, names, q, () => {});
      for (const [i, value] of p.entries()) {
        const moved = p.with(i, 1.01 * value);
        const rings = deviance(stack, names, moved) - deviance(stack, names, p);
        const pixels = byPixels(moved) - byPixels(p);
        expect(Math.abs(rings - pixels)).toBeLessThan(1e-4 * (1 + Math.abs(pixels)));
      }
    }
  });

  it("are slope and function of each other, for amplified light with pooled pixels too", () => {
    for (const noise of [COUNTING, AMPLIFIED]) {
      const stack = data(noise);
      const { score, information } = scoreStack(stack, names, p);
      for (const [i, value] of p.entries()) {
        const h = 1e-4 * value;
        const at = (by: number) => deviance(stack, names, p.with(i, value + by));
        const slope = -(at(h) - at(-h)) / (4 * h);
        const unit = Math.sqrt(information[i * names.length + i]!);
        expect(Math.abs(score[i]! - slope) / unit).toBeLessThan(2e-3 * (1 + Math.abs(slope / unit)));
      }
    }
  });
});

describe("quasiDeviance", () => {
  it("has the slope −2(d − m)/V for any noise (Wedderburn 1974) and is −2 ln L of a Poisson count", () => {
    for (const noise of [COUNTING, AMPLIFIED, { excess: 1, floor: 4 }]) {
      const at = (m: number) => quasiDeviance(noise, 3, 20, m);
      for (const m of [0.4, 3, 40]) {
        const h = 1e-4 * m;
        const slope = (at(m + h) - at(m - h)) / (2 * h);
        expect(slope).toBeCloseTo((-2 * (20 - 3 * m)) / (noise.floor + noise.excess * m), 5);
      }
    }
    expect(quasiDeviance(COUNTING, 1, 7, 5)).toBeCloseTo(2 * (5 - 7 * Math.log(5)), 12);
  });
});
