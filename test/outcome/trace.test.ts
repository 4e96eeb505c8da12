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
