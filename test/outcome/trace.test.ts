import { describe, expect, it } from "vitest";
import { pull, recorded, resultOf } from "./recordings.ts";

const LINE = {
  recording: { height: null, width: 60, photons: 3e4 },
  motion: { centre_x: "2.97 um", centre_y: null },
};

describe("a streak trace", () => {
  it("gives D and τ of the truth where the slit is wide open", () => {
    const { stack, truth } = recorded(LINE);
    const result = resultOf(stack);
    expect(
      Math.abs(pull(result.quantities.diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)),
    ).toBeLessThan(4);
    expect(Math.abs(pull(result.quantities.lifetime!, truth.lifetime_ns))).toBeLessThan(4);
    expect(result.tensor).toBeNull();
    expect(result.frames[0]!.y_um).toBeNull();
  });

  it("behind a narrow slit the light that leaves sideways is not taken for decay", () => {
    const slit = { ...LINE, slit: { width: "0.3 um" } };
    const { stack, truth } = recorded(slit);
    const { lifetime, diffusion_coefficient: d } = resultOf(stack).quantities;
    expect(Math.abs(pull(lifetime!, truth.lifetime_ns))).toBeLessThan(4);
    expect(Math.abs(pull(d, truth.diffusion_coefficient_cm2_per_s))).toBeLessThan(4);
    const untold = recorded(slit, 1, (acquisition) => ({ ...acquisition, slit: null }));
    // σ_y grows from 0.35 to 0.67 µm over two lifetimes: unseen it shortens the lifetime by a third
    expect(resultOf(untold.stack).quantities.lifetime!.value).toBeLessThan(0.8 * truth.lifetime_ns);
  });

  it("has the spread MSD = 2Dt of one axis", () => {
    const { stack, truth } = recorded(LINE);
    const { frames } = resultOf(stack);
    const last = frames.filter((frame) => frame.used).at(-1)!;
    const msd = 2 * (truth.diffusion_coefficient_cm2_per_s / 10) * last.delay_ns;
    expect(Math.abs(last.msd_um2! - msd)).toBeLessThan(4.5 * last.u_msd_um2!);
  });
});

describe("a trace behind a slit over many draws", () => {
  // the law of spread says how much light leaves sideways, so its error is one of the lifetime
  const runs = Array.from({ length: 60 }, (_, seed) => {
    const { stack, truth } = recorded(
      { ...LINE, recording: { ...LINE.recording, photons: 1500 }, slit: { width: "0.3 um" } },
      900 + seed,
    );
    const { lifetime, diffusion_length: length } = resultOf(stack).quantities;
    return { tau: pull(lifetime!, truth.lifetime_ns), length: pull(length!, truth.diffusion_length_um) };
  });

  it.each(["tau", "length"] as const)("scatters in %s as u says", (key) => {
    const pulls = runs.map((run) => run[key]);
    const mean = pulls.reduce((a, b) => a + b, 0) / 60;
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(60));
    // 60 draws tell a standard deviation to 9 %
    expect(Math.sqrt(pulls.reduce((sum, p) => sum + (p - mean) ** 2, 0) / 59)).toBeLessThan(1.25);
  });
});
