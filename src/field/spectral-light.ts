import { lightBehindSlit, lightPerPixel } from "./aperture.ts";
import { changeRate, exposures } from "./exposure.ts";
import { frequency, type Grid, gridFor, moments } from "./grid.ts";
import { handedOver, modeRates } from "./linear-flow.ts";
import { type Medium, removalRate, type Start } from "./medium.ts";
import {
  type Accuracy,
  centreOf,
  EMPTY_LIGHT,
  type FrameLight,
  hasSlit,
  type MeanFrames,
  type Recording,
} from "./recording.ts";
import { Transform } from "./transform.ts";

/**
 * Mean frames without annihilation, exact in time, one Fourier mode at a time (see LinearFlow for the formulas); all
 * earlier pulses are geometric series, 1/(1 − e^(−ΓT)).
 *
 * @param medium with annihilation = 0
 */
export function spectralLight(
  medium: Medium,
  start: Start,
  recording: Recording,
  accuracy: Accuracy,
): MeanFrames {
  const grid = gridFor(start.covariance, medium.diffusion, lastAge(medium, recording), accuracy);
  const rates = modeRates(medium, grid);
  const initial = startSpectrum(grid, start);
  const negligible = 1e-15 * initial[0]!;
  const transform = new Transform(grid);
  const free = recording.delays.map(() => transform.spectrum());
  const caught = recording.delays.map(() => transform.spectrum());
  const trapRate = 1 / medium.trapLifetime;
  const { period } = recording;
  // what earlier pulses left in the traps: (S(1/τ_m) − S(Γ))/(Γ − 1/τ_m), written so that nothing cancels
  const earlier = (rate: number) =>
    period === null
      ? 0
      : handedOver(rate, trapRate, period) * pulseTrain(trapRate, period) * pulseTrain(rate, period);
  for (const { frame, age, weight } of exposures(recording, changeRate(medium, start))) {
    const light = free[frame]!;
    const dark = caught[frame]!;
    const trapSurvival = Math.exp(-trapRate * age);
    for (let i = 0; i < rates.length; i++) {
      if (initial[i]! < negligible) continue;
      const survival = Math.exp(-rates[i]! * age);
      const train = pulseTrain(rates[i]!, recording.period);
      const born = weight * initial[i]!;
      light[2 * i] = light[2 * i]! + born * survival * train;
      if (medium.capture > 0) {
        const fresh = handedOver(rates[i]!, trapRate, age);
        const caughtNow = fresh * train + trapSurvival * earlier(rates[i]!);
        dark[2 * i] = dark[2 * i]! + born * medium.capture * caughtNow;
      }
    }
  }
  return collect(grid, transform, free, caught, medium.trapLight, recording);
}

/** Frames and their truth from the spectra of n and m. The spectra are used up. */
export function collect(
  grid: Grid,
  transform: Transform,
  free: readonly Float64Array[],
  caught: readonly Float64Array[],
  trapLight: number,
  recording: Recording,
): MeanFrames {
  const frames: Float64Array[] = [];
  const light: FrameLight[] = [];
  free.forEach((spectrum, frame) => {
    const dark = caught[frame]!;
    for (let i = 0; i < dark.length; i++) {
      dark[i] = dark[i]! * trapLight;
      spectrum[i] = spectrum[i]! + dark[i]!;
    }
    frames.push(lightPerPixel(grid, spectrum, recording, centreOf(recording, frame)));
    light.push(
      hasSlit(recording)
        ? slitLight(grid, spectrum, dark, recording)
        : planeLight(grid, transform, spectrum, dark),
    );
  });
  return { frames, light };
}

function slitLight(grid: Grid, spectrum: Float64Array, dark: Float64Array, recording: Recording): FrameLight {
  const { amount, varianceX } = lightBehindSlit(grid, spectrum, recording);
  if (amount === 0) return EMPTY_LIGHT;
  const caught = dark[0] === 0 ? 0 : lightBehindSlit(grid, dark, recording).amount;
  return { amount, covariance: [varianceX, 0, 0], caughtShare: caught / amount };
}

function planeLight(
  grid: Grid,
  transform: Transform,
  spectrum: Float64Array,
  dark: Float64Array,
): FrameLight {
  if (spectrum[0] === 0) return EMPTY_LIGHT;
  const caughtShare = dark[0]! / spectrum[0]!;
  const field = new Float64Array(grid.nx * grid.ny);
  transform.toField(spectrum, field);
  return { ...moments(grid, field), caughtShare };
}

/** The age up to which a spot must keep clear of the border, ns. */
export function lastAge(medium: Medium, { delays, gate, period, responseSigma }: Recording): number {
  const last = Math.max(0, ...delays) + gate + 6 * responseSigma;
  // a spot older than twelve lifetimes gives less than 1e-5 of the light
  return period === null ? last : Math.max(Math.min(last, period), 12 / removalRate(medium));
}

/** Σ exp(−rate·jT) over all pulses j ≥ 0. */
function pulseTrain(rate: number, period: number | null): number {
  return period === null ? 1 : -1 / Math.expm1(-rate * period);
}

/** Fourier transform of the start's Gaussian, real: amount·exp(−½ qᵀΣ₀q)/(hx·hy). */
function startSpectrum({ nx, ny, hx, hy }: Grid, { amount, covariance: [xx, xy, yy] }: Start): Float64Array {
  const spectrum = new Float64Array((nx / 2 + 1) * ny);
  for (let kx = 0; kx <= nx / 2; kx++) {
    const qx = frequency(kx, nx, hx);
    for (let ky = 0; ky < ny; ky++) {
      const qy = frequency(ky, ny, hy);
      spectrum[kx * ny + ky] =
        (amount / (hx * hy)) * Math.exp(-0.5 * (xx * qx * qx + 2 * xy * qx * qy + yy * qy * qy));
    }
  }
  return spectrum;
}
