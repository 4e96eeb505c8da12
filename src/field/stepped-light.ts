import { Evolution } from "./evolution.ts";
import { exposures } from "./exposure.ts";
import { gridFor } from "./grid.ts";
import { type Medium, peakDensity, type Start } from "./medium.ts";
import type { Accuracy, MeanFrames, Recording } from "./recording.ts";
import { collect, fastestRate, lastAge } from "./spectral-light.ts";

const MOST_PULSES = 500;

/**
 * Mean frames with annihilation, stepped in time. With a period the pulses are followed until each leaves the same
 * density behind; every pulse brings the same start.
 */
export function steppedLight(
  medium: Medium,
  start: Start,
  recording: Recording,
  accuracy: Accuracy,
): MeanFrames {
  const grid = gridFor(start.covariance, medium.diffusion, lastAge(medium, recording), accuracy);
  const evolution = new Evolution(medium, start, grid, accuracy.tolerance);
  if (recording.period !== null) settle(evolution, recording.period, accuracy.tolerance * 1e-3);
  const { transform } = evolution;
  const freeFields = recording.delays.map(() => new Float64Array(grid.nx * grid.ny));
  const caught = recording.delays.map(() => transform.spectrum());
  const wake = recording.delays.map(() => 0);
  const rate = fastestRate(medium, start) + medium.annihilation * peakDensity(start);
  for (const { frame, age, weight } of exposures(recording.delays, recording.gate, recording.period, rate)) {
    evolution.advance(age);
    addTo(freeFields[frame]!, evolution.free, weight);
    addTo(caught[frame]!, evolution.caught, weight);
    wake[frame] = wake[frame]! + weight * Math.exp(-age / medium.trapLifetime);
  }
  if (recording.period !== null && medium.capture > 0) {
    evolution.advance(recording.period);
    // caught excitons of all earlier pulses, each like this one: a geometric series
    const earlier = -1 / Math.expm1(-recording.period / medium.trapLifetime);
    caught.forEach((spectrum, frame) => {
      addTo(spectrum, evolution.caught, earlier * wake[frame]!);
    });
  }
  const free = freeFields.map((field) => {
    const spectrum = transform.spectrum();
    transform.toSpectrum(field, spectrum);
    return spectrum;
  });
  return collect(grid, transform, free, caught, medium.trapLight, recording);
}

function settle(evolution: Evolution, period: number, tolerance: number): void {
  let before = 0;
  for (let pulse = 0; pulse < MOST_PULSES; pulse++) {
    evolution.advance(period);
    const left = evolution.free.reduce((sum, n) => sum + n, 0);
    evolution.pulse();
    const now = evolution.free.reduce((sum, n) => sum + n, 0);
    if (Math.abs(left - before) <= tolerance * now) break;
    before = left;
  }
  evolution.emptyTraps();
}

function addTo(sum: Float64Array, values: Float64Array, weight: number): void {
  for (let i = 0; i < sum.length; i++) sum[i] = sum[i]! + weight * values[i]!;
}
