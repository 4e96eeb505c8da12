import { DenseLight } from "./dense-light.ts";
import { Evolution } from "./evolution.ts";
import { changeRate, type Exposure, exposures } from "./exposure.ts";
import { gridFor } from "./grid.ts";
import type { Medium, Start } from "./medium.ts";
import type { Accuracy, MeanFrames, Recording } from "./recording.ts";
import { collect, lastAge } from "./spectral-light.ts";

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
  const free = recording.delays.map(() => transform.spectrum());
  const caught = recording.delays.map(() => transform.spectrum());
  const list = exposures(recording, changeRate(medium, start));
  const dense = new DenseLight(evolution, medium);
  let next = 0;
  const collectStep = () => {
    dense.stepped();
    const reached: Exposure[] = [];
    while (next < list.length && list[next]!.age <= dense.age) reached.push(list[next++]!);
    for (const [frame, samples] of byFrame(reached)) dense.add(samples, free[frame]!, caught[frame]!);
  };
  const last = list.at(-1)?.age ?? 0;
  // an exposure at the very pulse needs a step behind it too
  evolution.advance(Math.max(last, Number.MIN_VALUE), collectStep);
  if (recording.period !== null && medium.capture > 0) {
    evolution.advance(recording.period);
    addWake(list, evolution.caught, caught, medium.trapLifetime, recording.period);
  }
  return collect(grid, transform, free, caught, medium.trapLight, recording);
}

/** Caught excitons of all earlier pulses, each like the last one: a geometric series, emptying with τ_m. */
function addWake(
  list: readonly Exposure[],
  left: Float64Array,
  caught: readonly Float64Array[],
  trapLifetime: number,
  period: number,
): void {
  const train = -1 / Math.expm1(-period / trapLifetime);
  for (const [frame, samples] of byFrame(list)) {
    const weight = samples.reduce((sum, { age, weight }) => sum + weight * Math.exp(-age / trapLifetime), 0);
    const spectrum = caught[frame]!;
    for (let i = 0; i < left.length; i++) spectrum[i] = spectrum[i]! + weight * train * left[i]!;
  }
}

function byFrame(list: readonly Exposure[]): Map<number, Exposure[]> {
  const groups = new Map<number, Exposure[]>();
  for (const exposure of list) {
    const group = groups.get(exposure.frame);
    if (group === undefined) groups.set(exposure.frame, [exposure]);
    else group.push(exposure);
  }
  return groups;
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
