import { describe, expect, it } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import { analysed, codesOf, pull, recorded, resultOf } from "./recordings.ts";

// each run is one seeded draw: four standard uncertainties hold in 99.99 % of them

describe("a plain recording", () => {
  const { stack, truth } = recorded();
  const { result, spots, spreadCurve, lightCurve, lightResiduals } = analysed(stack);
  const { diffusion_coefficient: d, lifetime, diffusion_length: length, mobility } = result.quantities;

  it("gives D, τ and L of the truth within their uncertainties, and is sound", () => {
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(4);
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(4);
    expect(Math.abs(pull(length!, truth.diffusion_length_um))).toBeLessThan(4);
    expect(d.u / d.value).toBeLessThan(0.02);
    expect(result.verdict.level).toBe("sound");
    expect(result.transport.preferred).toBe("line");
    expect(result.decay!.preferred).toBe("exponential");
  });

  it("gives L as √(Dτ), and beside it √2 and twice of that", () => {
    const root = Math.sqrt((d.value / 10) * lifetime!.value);
    expect(length!.value).toBeCloseTo(root, 10);
    expect(result.lengths.map((l) => l.value_um / root)).toEqual([
      expect.closeTo(1, 10),
      expect.closeTo(1, 10),
      expect.closeTo(Math.SQRT2, 10),
      expect.closeTo(2, 10),
    ]);
  });

  it("gives μ = eD/k_BT: 38.68 V⁻¹ times D at 300 K", () => {
    // 1.602176634e-19 / (1.380649e-23 · 300), exact constants of the SI
    expect(mobility!.value / d.value).toBeCloseTo(38.6817, 4);
  });

  it("gives intervals of 1.96 u about D, and an interval of L that holds L", () => {
    expect(d.interval95[1] - d.value).toBeCloseTo(1.959964 * d.u, 8);
    expect(length!.interval95[0]).toBeLessThan(length!.value);
    expect((length!.interval95[1] - length!.interval95[0]) / (2 * 1.96 * length!.u)).toBeCloseTo(1, 1);
  });

  it("shows every frame's spot, width and light near the truth", () => {
    const extra = truth.blur_variance_um2 + truth.pixel_variance_um2;
    result.frames.forEach((row, i) => {
      const real = truth.frames[i]!;
      expect(row.used).toBe(true);
      expect(Math.abs(row.photons! - real.photons)).toBeLessThan(4.5 * row.u_photons!);
      expect(Math.abs(row.variance_um2! - real.variance_um2 - extra)).toBeLessThan(4.5 * row.u_variance_um2!);
      expect(spots[i]!.photons).toBeGreaterThan(0);
    });
  });

  it("draws the law across the window, the decay at its frames, and residuals that scatter by one", () => {
    expect(spreadCurve[0]!.delay).toBeCloseTo(0, 12);
    expect(spreadCurve.at(-1)!.delay).toBeCloseTo(0.3 * 29, 9);
    const slope =
      (spreadCurve.at(-1)!.value - spreadCurve[0]!.value) /
      (spreadCurve.at(-1)!.delay - spreadCurve[0]!.delay);
    expect((10 * slope) / 2 / d.value).toBeCloseTo(1, 8);
    expect(lightCurve).toHaveLength(30);
    const squares = lightResiduals.reduce((sum: number, r) => sum + r! ** 2, 0) / 28;
    expect(squares).toBeGreaterThan(0.4);
    expect(squares).toBeLessThan(1.9);
  });

  it("is the same when it is run again", () => {
    const again = resultOf(stack);
    expect(again.quantities).toEqual(result.quantities);
    expect(again.verdict).toEqual(result.verdict);
  });

  it("gives D without bias over 40 draws, scattering as u says", () => {
    const pulls = Array.from({ length: 40 }, (_, seed) => {
      const one = recorded({ recording: { photons: 3000, frames: 15 }, time: { step: "0.6 ns" } }, 50 + seed);
      return pull(
        resultOf(one.stack).quantities.diffusion_coefficient,
        truth.diffusion_coefficient_cm2_per_s,
      );
    });
    const mean = pulls.reduce((a, b) => a + b, 0) / 40;
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(40));
    expect(pulls.reduce((sum, p) => sum + (p - mean) ** 2, 0) / 39).toBeLessThan(2.1);
  });
});

describe("what lies off the plain road", () => {
  it("a camera with offset, gain, read and excess noise gives the same truth with larger u", () => {
    const { stack, truth } = recorded({
      detector: { offset: 100, gain: 8, read_noise: 12, excess_noise: 2 },
    });
    const { diffusion_coefficient: d, lifetime } = resultOf(stack).quantities;
    const counted = resultOf(recorded().stack).quantities;
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(4);
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(4);
    // excess noise 2 alone makes √2
    expect(d.u / counted.diffusion_coefficient.u).toBeGreaterThan(1.41);
    expect(d.u / counted.diffusion_coefficient.u).toBeLessThan(2.4);
  });

  it("gates average over the frame: D and τ stay those of the truth", () => {
    const { stack, truth } = recorded({ time: { gate: "0.3 ns" } }, 3);
    const { diffusion_coefficient: d, lifetime } = resultOf(stack).quantities;
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(4);
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(4);
  });

  it("gates are placed by their middle: the intercept is the spot at the pulse, blur and pixel included", () => {
    const { stack, truth } = recorded({ time: { gate: "0.3 ns" } }, 3);
    const { intercept } = resultOf(stack).transport.models.line!.parameters;
    const start = truth.initial_variance_um2[0] + truth.blur_variance_um2 + truth.pixel_variance_um2;
    expect(Math.abs(intercept!.value - start)).toBeLessThan(4 * intercept!.u);
    expect(intercept!.u).toBeLessThan(0.2 * 2 * 0.02 * 0.15);
  });

  it("a drifting spot spreads as one at rest, and the drift is said", () => {
    const { stack, truth } = recorded({ motion: { drift_x: "30 nm/ns" } }, 2);
    const result = resultOf(stack);
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
    expect(codesOf(result)).toContain("spot-drifts");
  });

  it("saturated frames are set aside and said", () => {
    const { stack, truth } = recorded({ detector: { saturation: 250 } });
    const result = resultOf(stack);
    const saturated = result.frames.filter((frame) => frame.flags.includes("saturated"));
    expect(saturated.map((frame) => frame.index)).toEqual([...saturated.keys()]);
    expect(saturated.length).toBeGreaterThan(0);
    expect(saturated.some((frame) => frame.used || frame.used_in_decay)).toBe(false);
    expect(codesOf(result)).toContain("frames-saturated");
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
  });

  it("cosmic rays and a hot pixel move nothing by more than a tenth of u", () => {
    const { stack } = recorded();
    const frames = Array.from({ length: stack.frames }, (_, i) => {
      const data = new Float64Array(stack.width * stack.height);
      stack.read(i, data);
      data[5 * stack.width + 40]! += 900;
      return data;
    });
    frames[0]![24 * stack.width + 25]! += 4000;
    frames[7]![20 * stack.width + 22]! += 700;
    frames[7]![20 * stack.width + 23]! += 500;
    const struck = memoryStack({
      frames,
      width: stack.width,
      height: stack.height,
      acquisition: stack.acquisition,
    });
    const [clean, result] = [resultOf(stack), resultOf(struck)];
    expect(result.frames[7]!.hot_pixels).toBe(3);
    expect(result.frames[0]!.hot_pixels).toBe(2);
    for (const key of ["diffusion_coefficient", "lifetime", "diffusion_length"] as const) {
      const [a, b] = [clean.quantities[key]!, result.quantities[key]!];
      expect(Math.abs(b.value - a.value) / a.u).toBeLessThan(0.1);
    }
  });

  it.each([
    ["far from the spot", [10 * 48 + 12]],
    ["in the spot, two side by side", [24 * 48 + 26, 24 * 48 + 27]],
  ])("pixels at full scale in every frame of a faint recording cost nothing: %s", (_, places) => {
    const { stack, truth } = recorded({ recording: { photons: 3000 } });
    const frames = Array.from({ length: stack.frames }, (_, i) => {
      const data = new Float64Array(stack.width * stack.height);
      stack.read(i, data);
      for (const place of places) data[place] = 65535;
      return data;
    });
    const { width, height, acquisition } = stack;
    const result = resultOf(memoryStack({ frames, width, height, acquisition }));
    expect(result.frames.every((frame) => frame.hot_pixels === places.length)).toBe(true);
    const { diffusion_coefficient: d, lifetime } = result.quantities;
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(4);
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(4);
    expect(d.u / resultOf(stack).quantities.diffusion_coefficient.u).toBeCloseTo(1, 1);
    expect(result.verdict.level).toBe("sound");
  });

  it("an empty frame, all of one number, is flagged and used nowhere", () => {
    const { stack } = recorded();
    const frames = Array.from({ length: stack.frames }, (_, i) => {
      const data = new Float64Array(stack.width * stack.height);
      if (i !== 11) stack.read(i, data);
      return data;
    });
    const { width, height, acquisition } = stack;
    const result = resultOf(memoryStack({ frames, width, height, acquisition }));
    expect(result.frames[11]!.flags).toEqual(["empty"]);
    expect(result.frames[11]!.used || result.frames[11]!.used_in_decay).toBe(false);
    expect(result.transport.window.frames).toBe(29);
  });

  it("a dark frame stands for the offset, and saturation is counted in stored counts", () => {
    const { stack, truth } = recorded({ detector: { offset: 0, saturation: 65535 } });
    const random = createRandom(77);
    const dark = Float64Array.from(
      { length: stack.width * stack.height },
      () => 200 + Math.round(50 * random.uniform()),
    );
    const frames = Array.from({ length: stack.frames }, (_, i) => {
      const data = new Float64Array(dark.length);
      stack.read(i, data);
      const shifted = data.map((value, at) => value + dark[at]!);
      if (i === 0) for (const at of [24 * 48 + 24, 24 * 48 + 25, 25 * 48 + 24]) shifted[at] = 65535;
      return shifted;
    });
    const { width, height, acquisition } = stack;
    const result = resultOf(memoryStack({ frames, width, height, acquisition, dark }));
    expect(result.frames.map((frame) => frame.flags.includes("saturated")).indexOf(true)).toBe(0);
    expect(result.frames.filter((frame) => frame.flags.includes("saturated"))).toHaveLength(1);
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
  });

  it.each([3, 4, 5, 9])("%i frames are enough for a result", (frames) => {
    const { stack, truth } = recorded({ recording: { frames }, time: { step: "0.9 ns" } });
    const { quantities, transport } = resultOf(stack);
    expect(transport.window.frames).toBe(frames);
    expect(
      Math.abs(pull(quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
  });

  it("two frames are refused in one sentence", () => {
    const { stack } = recorded({ recording: { frames: 2 } });
    expect(() => resultOf(stack)).toThrow(/only 2 of 2 frames open at or after the pulse/);
  });

  it("frames before the pulse are told apart from the window", () => {
    const { stack, truth } = recorded({ recording: { frames: 34 }, time: { first: "-1.2 ns" } });
    const result = resultOf(stack);
    expect(result.frames.slice(0, 4).map((frame) => frame.flags)).toEqual(Array(4).fill(["before-pulse"]));
    expect(result.transport.window.from_ns).toBeCloseTo(0, 9);
    expect(Math.abs(pull(result.quantities.lifetime!, truth.lifetime_ns))).toBeLessThan(4);
  });
});

describe("the window of delays", () => {
  const { stack, truth } = recorded();

  it("keeps the law of spread between from and to, and the decay on all frames", () => {
    const result = resultOf(stack, { from: 1.2, to: 6 });
    expect(result.transport.window).toEqual({
      from_ns: expect.closeTo(1.2, 9),
      to_ns: expect.closeTo(6, 9),
      frames: 17,
    });
    expect(result.frames[3]!.flags).toEqual(["outside-window"]);
    expect(result.frames[3]!.used_in_decay).toBe(true);
    expect(result.frames[21]!.flags).toEqual(["outside-window"]);
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
    expect(result.provenance.options).toMatchObject({ from_ns: 1.2, to_ns: 6 });
  });

  it("is refused where it leaves too few frames", () => {
    expect(() => resultOf(stack, { from: 1, to: 1.3 })).toThrow(/frames are left for the law of spread/);
  });
});
