import { develop, developed } from "./develop.ts";
import { byFrame, changeRate, exposures } from "./exposure.ts";
import { frequency, type Grid, gridFor } from "./grid.ts";
import { handedOver, modeRates } from "./linear-flow.ts";
import { type Medium, removalRate, type Start } from "./medium.ts";
import type { Accuracy, MeanFrames, Recording } from "./recording.ts";
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
  const trapRate = 1 / medium.trapLifetime;
  const { period } = recording;
  // what earlier pulses left in the traps: (S(1/τ_m) − S(Γ))/(Γ − 1/τ_m), written so that nothing cancels
  const earlier = (rate: number) =>
    period === null
      ? 0
      : handedOver(rate, trapRate, period) * pulseTrain(trapRate, period) * pulseTrain(rate, period);
  const transform = new Transform(grid);
  const groups = byFrame(exposures(recording, changeRate(medium, start)));
  return developed(recording, (frame) => {
    const exposed = groups.get(frame);
    if (exposed === undefined) return null;
    const free = transform.spectrum();
    const caught = transform.spectrum();
    for (let i = 0; i < rates.length; i++) {
      if (initial[i]! < negligible) continue;
      const rate = rates[i]!;
      const train = pulseTrain(rate, period);
      const left = medium.capture > 0 ? earlier(rate) : 0;
      for (const { age, weight } of exposed) {
        const born = weight * initial[i]!;
        free[2 * i] = free[2 * i]! + born * Math.exp(-rate * age) * train;
        if (medium.capture === 0) continue;
        const caughtNow = handedOver(rate, trapRate, age) * train + Math.exp(-trapRate * age) * left;
        caught[2 * i] = caught[2 * i]! + born * medium.capture * caughtNow;
      }
    }
    return develop({ grid, transform, recording, frame, free, caught, trapLight: medium.trapLight });
  });
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
