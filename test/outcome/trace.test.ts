import { describe, expect, it } from "vitest";
import { fitDecays } from "../../src/decay/fit.ts";
import { joinFits } from "../../src/outcome/joint.ts";
import { readRecording } from "../../src/outcome/read-recording.ts";
import { transmission } from "../../src/outcome/transmission.ts";
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

describe("the lifetime behind a slit", () => {
  it("answers to an error of D by the light read anew and by the light that leaves sideways", () => {
    const { stack } = recorded({ ...LINE, slit: { width: "0.3 um" } });
    const reading = readRecording(stack);
    const { light, times, models, line } = reading;
    const lifetimeAt = (shift: number): number => {
      const pick = (f: (i: number) => number) => Float64Array.from(light.frames, f);
      const grown = {
        ...models,
        variance: (i: number) => models.variance(i).map((v) => v + 2 * shift * times[i]!),
      };
      return fitDecays({
        delays: pick((i) => stack.acquisition.time.delays[i]!),
        gate: stack.acquisition.time.gate,
        response: null,
        period: null,
        light: pick((i) => light.value[i]! + light.perVariance[i]![0]! * 2 * shift * times[i]!),
        sigma: pick((i) => light.sigma[i]!),
        transmission: transmission(stack.acquisition, "trace", grown, light.frames),
        emissionOrder: 1,
      }).fits.exponential!.lifetime.value;
    };
    const h = 1e-5;
    // with a unit covariance of (Σ₀, D) the shared covariance is the answer itself
    const unit = { ...line, covariance: Float64Array.of(1, 0, 0, 1), chi2: line.degreesOfFreedom };
    const { cross } = joinFits({ ...reading, line: unit });
    expect(cross[1 * 2 + 1]! / ((lifetimeAt(h) - lifetimeAt(-h)) / (2 * h))).toBeCloseTo(1, 2);
  });
});
