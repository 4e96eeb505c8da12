import { describe, expect, it } from "vitest";
import { fitDecays } from "../../src/decay/fit.ts";
import { gamma } from "../../src/numerics/distributions.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { joinFits } from "../../src/outcome/joint.ts";
import { squaredLength } from "../../src/outcome/length.ts";
import { readRecording } from "../../src/outcome/read-recording.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import type { TransportLaw } from "../../src/transport/laws.ts";
import { fitLaws } from "../../src/transport/laws.ts";
import { pictureOf } from "../frame/pictures.ts";
import { pull, recorded, resultOf } from "./recordings.ts";

const base = readRecording(recorded({ recording: { frames: 8 } }).stack);
const TAU = 5;

/** L² by its definition for a law of spread given as a curve, µm², and light that dies as e^(−t/5 ns). */
function squareOf(law: TransportLaw, curve: (t: number) => number, order: 1 | 2 = 1) {
  const times = Array.from({ length: 60 }, (_, i) => 0.05 + 0.25 * i);
  const laws = fitLaws(
    times.map((time, frame) => ({ frame, time, variance: [curve(time)], covariance: Float64Array.of(1e-6) })),
  );
  const light = times.map((t) => 1e5 * Math.exp(-t / TAU));
  const decays = fitDecays({
    delays: times,
    gate: 0,
    response: null,
    period: null,
    light,
    sigma: light.map(Math.sqrt),
    transmission: null,
    emissionOrder: 1,
  });
  const decay = decays.fits.exponential!;
  const reading = { ...base, laws, preferredLaw: law };
  const mean = { value: decay.amplitudeAveraged.value, u: 0 };
  return squaredLength(reading, joinFits(reading), decay, order, mean);
}

describe("L² = ½⟨x²⟩ at recombination", () => {
  it("of motion that comes to rest is D·t_a·τ/(t_a + τ)", () => {
    // ½∫2D·e^(−t/t_a)·e^(−t/τ) dt
    const [d, ta] = [0.05, 3];
    const { value } = squareOf("arrest", (t) => 0.2 + 2 * d * ta * (1 - Math.exp(-t / ta)));
    expect(value / ((d * ta * TAU) / (ta + TAU))).toBeCloseTo(1, 3);
  });

  it.each([0.6, 1, 1.7])("of a power law of exponent %f is Γ·Γ(1 + α)·τ^α", (alpha) => {
    // ½∫2Γα·t^(α−1)·e^(−t/τ) dt
    const { value } = squareOf("power_law", (t) => 0.2 + 2 * 0.04 * t ** alpha);
    expect(value / (0.04 * gamma(1 + alpha) * TAU ** alpha)).toBeCloseTo(1, 2);
  });

  it("of a line that breaks at t_b is Dτ(1 − e^(−t_b/τ)) + D_late·τ·e^(−t_b/τ)", () => {
    const [d, late, tb] = [0.05, 0.01, 4];
    const { value } = squareOf("broken_line", (t) =>
      t < tb ? 0.2 + 2 * d * t : 0.2 + 2 * d * tb + 2 * late * (t - tb),
    );
    const left = Math.exp(-tb / TAU);
    expect(value / (d * TAU * (1 - left) + late * TAU * left)).toBeCloseTo(1, 3);
  });

  it("doubles where light goes with the square of the density", () => {
    const curve = (t: number) => 0.2 + 2 * 0.05 * 3 * (1 - Math.exp(-t / 3));
    expect(squareOf("arrest", curve, 2).value / squareOf("arrest", curve).value).toBeCloseTo(2, 10);
  });

  it("carries the law's uncertainty: that of 1/4 of D where nothing else is uncertain", () => {
    const short = squareOf("arrest", (t) => 0.2 + 2 * 0.05 * 3 * (1 - Math.exp(-t / 3)));
    expect(short.u).toBeGreaterThan(0);
    expect(short.u / short.value).toBeLessThan(0.1);
  });
});

describe("L of light with two lifetimes", () => {
  // fast and slow share one motion: Σ = 0.13 + 2·0.02·t µm², light 0.6·e^(−t/1.5) + 0.4·e^(−t/9)
  const { stack } = recorded({ recording: { frames: 40 }, time: { step: "0.4 ns" } });
  const { width, height, acquisition } = stack;
  const random = createRandom(41);
  const frames = acquisition.time.delays.map((t) => {
    const v = (0.13 + 2 * 0.02 * t) / 0.01;
    const photons = 3e5 * (0.6 * Math.exp(-t / 1.5) + 0.4 * Math.exp(-t / 9));
    return pictureOf(Float64Array.of(photons, 23.3, 23.7, v, 0, v, 0.3), width, height).map((mean) =>
      random.poisson(mean),
    );
  });
  const { quantities, decay } = resultOf(memoryStack({ frames, width, height, acquisition }));
  const amplitude = 0.6 * 1.5 + 0.4 * 9;

  it("is √(D·⟨τ⟩) with the amplitude-averaged lifetime", () => {
    expect(decay!.preferred).toBe("two_exponentials");
    expect(Math.abs(pull(decay!.amplitude_averaged_lifetime_ns, amplitude))).toBeLessThan(4);
    expect(Math.abs(pull(quantities.diffusion_length!, Math.sqrt(0.02 * amplitude)))).toBeLessThan(4);
    expect(quantities.diffusion_length!.u / quantities.diffusion_length!.value).toBeLessThan(0.02);
  });

  it("has an intensity-averaged lifetime beside it, Στ²a/Στa", () => {
    const intensity = (0.6 * 1.5 ** 2 + 0.4 * 81) / amplitude;
    expect(Math.abs(pull(decay!.intensity_averaged_lifetime_ns, intensity))).toBeLessThan(4);
  });
});
