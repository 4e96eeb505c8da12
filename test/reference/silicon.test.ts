import { describe, expect, it } from "vitest";
import { joinFits } from "../../src/outcome/joint.ts";
import { quantitiesOf } from "../../src/outcome/quantities.ts";
import { readRecording } from "../../src/outcome/read-recording.ts";
import { recorded } from "../outcome/recordings.ts";

/**
 * Minority carriers in lightly doped silicon at 300 K as the textbooks of semiconductor physics give them (from memory):
 * electrons D = 36 cm²/s, τ = 1 ms in a good wafer, L = 1.9 mm, μ ≈ 1400 cm²/(V s); holes D = 12 cm²/s, L = 1.1 mm,
 * μ ≈ 450 to 480 cm²/(V s).
 */
const reading = readRecording(
  recorded({ recording: { frames: 10 }, sample: { temperature: "300 K" } }).stack,
);

/** D in cm²/s and τ in ns put in place of the recording's own, then the same road to L and μ. */
function carriers(d: number, tau: number) {
  const internal = d / 10;
  const line = { ...reading.line, diffusion: [internal, 0, internal] };
  const joint = joinFits({ ...reading, line });
  const time = (value: number) => ({ value, u: 0, gradient: joint.decay!.lifetime.gradient });
  const decay = { ...joint.decay!, lifetime: time(tau), amplitudeAveraged: time(tau) };
  return quantitiesOf({ ...reading, line }, { ...joint, decay }, 1).quantities;
}

describe("silicon at 300 K", () => {
  it("electrons: D = 36 cm²/s and τ = 1 ms make L = 1.9 mm and μ = 1400 cm²/(V s)", () => {
    const { diffusion_length: length, mobility, diffusion_coefficient: d } = carriers(36, 1e6);
    expect(d.value).toBeCloseTo(36, 10);
    expect(Math.abs(length!.value / 1900 - 1)).toBeLessThan(0.01);
    expect(Math.abs(mobility!.value / 1400 - 1)).toBeLessThan(0.01);
  });

  it("holes: D = 12 cm²/s and τ = 1 ms make L = 1.1 mm and μ = 450 to 480 cm²/(V s)", () => {
    const { diffusion_length: length, mobility } = carriers(12, 1e6);
    expect(Math.abs(length!.value / 1100 - 1)).toBeLessThan(0.01);
    expect(mobility!.value).toBeGreaterThan(450);
    expect(mobility!.value).toBeLessThan(480);
  });
});
