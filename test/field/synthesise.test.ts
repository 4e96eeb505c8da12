import { parse } from "smol-toml";
import { describe, expect, it } from "vitest";
import { readScenario } from "../../src/field/scenario.ts";
import { drawFrames, expectation, picturesOf, synthesise } from "../../src/field/synthesise.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { InputFault } from "../../src/stack/fault.ts";

const PLAIN = `
[recording]
frames = 6
width = 24
height = 20
photons = 5e4
background = 0.3
seed = 5
[space]
pixel = "0.15 um ± 1 %"
[time]
first = "-1 ns"
step = "1 ns"
gate = "0.5 ns"
[motion]
diffusion_coefficient = "0.5 cm^2/s"
sigma0 = "0.3 um"
[life]
lifetime = "6 ns"
[sample]
name = "Alder"
temperature = "295 K ± 2 K"
`;

function scenario(text: string) {
  return readScenario(text, "spot.toml");
}

describe("synthesise", () => {
  it("expects the stated photons in the first frame after the pulse, on the stated background", () => {
    const { frames, truth } = expectation(scenario(PLAIN));
    expect(truth.frames[1]!.photons).toBeCloseTo(5e4, 6);
    expect(Math.max(...frames[0]!)).toBe(0.3);
    // Poisson: the drawn sum lies within five standard deviations of the expected one
    const drawn = synthesise(scenario(PLAIN)).frames[1]!.reduce((sum, c) => sum + c, 0);
    const expected = frames[1]!.reduce((sum, c) => sum + c, 0);
    expect(Math.abs(drawn - expected)).toBeLessThan(5 * Math.sqrt(expected));
  });

  it("draws the same counts from the same seed and others from another", () => {
    const first = synthesise(scenario(PLAIN)).frames;
    expect(synthesise(scenario(PLAIN)).frames).toEqual(first);
    expect(synthesise(scenario(PLAIN.replace("seed = 5", "seed = 6"))).frames).not.toEqual(first);
  });

  it("draws around the expectation: χ² over all pixels near their number", () => {
    const plain = scenario(PLAIN);
    const mean = expectation(plain);
    let [chi2, pixels] = [0, 0];
    drawFrames(plain, mean, createRandom(11)).forEach((frame, f) => {
      frame.forEach((count, i) => {
        chi2 += (count - mean.frames[f]![i]!) ** 2 / mean.frames[f]![i]!;
        pixels++;
      });
    });
    // the variance of one term is 2 + 1/λ, and λ ≥ 0.3
    expect(Math.abs(chi2 - pixels)).toBeLessThan(4 * Math.sqrt((2 + 1 / 0.3) * pixels));
  });

  it("tells L = √(Dτ) and μ = eD/(k_B T) of plain diffusion", () => {
    const { truth } = expectation(scenario(PLAIN));
    expect(truth.diffusion_coefficient_cm2_per_s).toBeCloseTo(0.5, 12);
    expect(truth.diffusion_length_um).toBeCloseTo(Math.sqrt(0.05 * 6), 12);
    // e/k_B = 11604.518 K/V (CODATA 2018)
    expect(truth.mobility_cm2_per_v_s!).toBeCloseTo((0.5 * 11604.518) / 295, 6);
  });

  it("tells L from how long excitons move: √(D/(1/τ + c)) with capture", () => {
    const text = `${PLAIN}[life.x]`
      .replace("[life.x]", "")
      .replace('lifetime = "6 ns"', 'lifetime = "6 ns"\ncapture = "0.3 /ns"\ntrap_lifetime = "15 ns"');
    const { truth } = expectation(scenario(text));
    expect(truth.diffusion_length_um).toBeCloseTo(Math.sqrt(0.05 / (1 / 6 + 0.3)), 12);
    expect(truth.frames[0]!.trapped_share).toBe(0);
    expect(truth.frames[5]!.trapped_share).toBeGreaterThan(truth.frames[2]!.trapped_share);
  });

  it("tells L with annihilation from ∫N dt: on an unmoving spot ∫ e^(−t/τ) ln(1 + A)/A dt, A = k n₀ τ (1 − e^(−t/τ))", () => {
    const text = PLAIN.replace("0.5 cm^2/s", "1e-9 cm^2/s").replace(
      'lifetime = "6 ns"',
      'lifetime = "6 ns"\nannihilation = "0.5 /ns"',
    );
    const { truth } = expectation(scenario(text));
    // with u = 1 − e^(−t/τ) the integral is τ ∫₀¹ ln(1 + 3u)/(3u) du = −τ Li₂(−3)/3; Li₂(−3) = −1.939375420766708
    // (SciPy: scipy.special.spence(4))
    expect(truth.diffusion_length_um / Math.sqrt((1e-10 * 6 * 1.939375420766708) / 3)).toBeCloseTo(1, 5);
  });

  it("lays an acquisition file beside it that says what a measurement would know and nothing more", () => {
    const written = parse(synthesise(scenario(PLAIN)).acquisitionToml);
    expect(written).toEqual({
      axes: "TYX",
      space: { pixel: "0.15 um ± 1 %" },
      time: { first: "-1 ns", step: "1 ns", gate: "0.5 ns" },
      sample: { name: "Alder", temperature: "295 K ± 2 K" },
    });
  });

  it("lays a trace out as one page, a row of pixels for each delay", () => {
    const trace = synthesise(scenario(PLAIN.replace("height = 20\n", "")));
    const [page, ...others] = picturesOf(trace);
    expect(others).toHaveLength(0);
    expect([page!.height, page!.width]).toEqual([6, 24]);
    expect(Array.from(page!.data.slice(48, 72))).toEqual(Array.from(trace.frames[2]!));
  });

  it("refuses a recording that is dark when the first frame opens", () => {
    const text = PLAIN.replace('first = "-1 ns"', 'first = "500 ns"');
    expect(() => expectation(scenario(text))).toThrow(InputFault);
  });
});
