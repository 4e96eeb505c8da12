import { describe, expect, test } from "vitest";
import { type FrameSource, noiseOf } from "../../src/cli/noise.ts";
import { createRandom } from "../../src/numerics/random.ts";

function source(frames: readonly ArrayLike<number>[], height: number, width: number): FrameSource {
  return { frames: frames.length, height, width, read: (index, into) => into.set(frames[index] ?? []) };
}

/** A Gaussian spot of 6 pixels' width on a camera with the given gain, offset and read noise. */
function spotOn(gain: number, offset: number, readNoise: number, height: number, width: number): number[] {
  const random = createRandom(4);
  return Array.from({ length: height * width }, (_, i) => {
    const r2 = ((i % width) - width / 2) ** 2 + (Math.floor(i / width) - Math.floor(height / 2)) ** 2;
    return offset + gain * random.poisson(400 * Math.exp(-r2 / 72) + 1) + readNoise * random.normal();
  });
}

describe("the noise of a stack", () => {
  test.each([
    ["photon counting", 1, 0, 0],
    ["a camera of gain 8 on an offset of 100", 8, 100, 6],
  ])("finds the slope of variance over counts of %s within 10 %", (_, gain, offset, readNoise) => {
    const noise = noiseOf(source([spotOn(gain, offset, readNoise, 64, 64)], 64, 64));
    expect(noise?.slope).toBeGreaterThan(0.9 * gain);
    expect(noise?.slope).toBeLessThan(1.1 * gain);
  });

  test("finds it on a trace as well, within 15 %", () => {
    const rows = Array.from({ length: 40 }, (_, i) => spotOn(2, 10, 1, 40, 64).slice(64 * i, 64 * (i + 1)));
    const noise = noiseOf(source(rows, 1, 64));
    expect(noise?.slope).toBeGreaterThan(1.7);
    expect(noise?.slope).toBeLessThan(2.3);
  });

  test("gives no noise where all pixels are alike", () => {
    expect(noiseOf(source([new Float64Array(400).fill(7)], 20, 20))).toBe(null);
  });
});
