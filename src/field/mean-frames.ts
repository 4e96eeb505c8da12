import { gaussianLight } from "./gaussian-light.ts";
import type { Medium, Start } from "./medium.ts";
import { type Accuracy, DEFAULT_ACCURACY, type MeanFrames, type Recording } from "./recording.ts";
import { spectralLight } from "./spectral-light.ts";
import { steppedLight } from "./stepped-light.ts";

/**
 * The light that a recording would hold without noise, by the quickest exact way: Gaussian algebra for plain
 * diffusion, closed forms per Fourier mode with capture, time steps with annihilation or repulsion.
 *
 * @param medium what the excitons live in
 * @param start the spot one pulse makes; its unit of amount is the frames' unit
 * @param recording pixels, delays, gate, period, slit, blur, drift
 * @returns frames, row-major (y, x), and each frame's amount, covariance (µm²) and share of caught light
 * @throws RangeError where the spot outgrows any grid, or pulses follow each other and nothing ends
 */
export function meanFrames(
  medium: Medium,
  start: Start,
  recording: Recording,
  accuracy: Accuracy = DEFAULT_ACCURACY,
): MeanFrames {
  const endless = medium.capture > 0 ? medium.trapLifetime === Infinity : medium.lifetime === Infinity;
  if (recording.period !== null && endless) {
    throw new RangeError("Excitons that never end pile up over the pulses: give a lifetime or no period.");
  }
  if (medium.annihilation > 0 || medium.repulsion > 0)
    return steppedLight(medium, start, recording, accuracy);
  if (medium.capture > 0) return spectralLight(medium, start, recording, accuracy);
  return gaussianLight(medium, start, recording);
}
