import { DenseLight } from "./dense-light.ts";
import { develop, developed } from "./develop.ts";
import { Evolution } from "./evolution.ts";
import { byFrame, changeRate, type Exposure, exposures } from "./exposure.ts";
import { gridFor } from "./grid.ts";
import { type Medium, removalRate, type Start } from "./medium.ts";
import { pushedTime } from "./pushed-spread.ts";
import type { Accuracy, MeanFrames, Recording } from "./recording.ts";
import { lastAge } from "./spectral-light.ts";

const MOST_PULSES = 500;

/**
 * Mean frames with annihilation or repulsion, stepped in time. With a period the pulses are followed until each leaves the same
 * density behind; every pulse brings the same start.
 */
export function steppedLight(
  medium: Medium,
  start: Start,
  recording: Recording,
  accuracy: Accuracy,
): MeanFrames {
  const grid = gridFor(start.covariance, medium.diffusion, spreadTime(medium, start, recording), accuracy);
  const evolution = new Evolution(medium, start, grid, accuracy.tolerance);
  if (recording.period !== null) settle(evolution, recording.period, accuracy.tolerance * 1e-3);
  const { transform } = evolution;
  const list = exposures(recording, changeRate(medium, start));
  const groups = byFrame(list);
  // traps that earlier pulses filled are known only after a whole period
  const wake = recording.period !== null && medium.capture > 0;
  const dense = new DenseLight(evolution, medium);
  const open = new Map<number, Spectra>();
  const done = new Map<number, ReturnType<typeof develop>>();
  const finish = (frame: number, { free, caught }: Spectra) => {
    open.delete(frame);
    done.set(
      frame,
      develop({ grid, transform, recording, frame, free, caught, trapLight: medium.trapLight }),
    );
  };
  let next = 0;
  const collectStep = () => {
    dense.stepped();
    const reached: Exposure[] = [];
    while (next < list.length && list[next]!.age <= dense.age) reached.push(list[next++]!);
    for (const [frame, samples] of byFrame(reached)) {
      const spectra = open.get(frame) ?? { free: transform.spectrum(), caught: transform.spectrum() };
      open.set(frame, spectra);
      dense.add(samples, spectra.free, spectra.caught);
      if (!wake && groups.get(frame)!.at(-1) === samples.at(-1)) finish(frame, spectra);
    }
  };
  const last = list.at(-1)?.age ?? 0;
  // an exposure at the very pulse needs a step behind it too
  evolution.advance(Math.max(last, Number.MIN_VALUE), collectStep);
  if (wake) evolution.advance(recording.period);
  for (const [frame, spectra] of open) {
    addWake(groups.get(frame)!, evolution.caught, spectra.caught, medium.trapLifetime, recording.period!);
    finish(frame, spectra);
  }
  return developed(recording, (frame) => done.get(frame) ?? null);
}

/** Time of plain diffusion that spreads a spot as far as it gets at its last age, the push of older pulses included. */
function spreadTime(medium: Medium, start: Start, recording: Recording): number {
  const { period } = recording;
  const pulses = period === null ? 1 : -1 / Math.expm1(-removalRate(medium) * period);
  return pushedTime(medium, { ...start, amount: pulses * start.amount }, lastAge(medium, recording));
}

interface Spectra {
  readonly free: Float64Array;
  readonly caught: Float64Array;
}

/** Caught excitons of all earlier pulses, each like the last one: a geometric series, emptying with τ_m. */
function addWake(
  samples: readonly Exposure[],
  left: Float64Array,
  caught: Float64Array,
  trapLifetime: number,
  period: number,
): void {
  const train = -1 / Math.expm1(-period / trapLifetime);
  const weight = samples.reduce((sum, { age, weight }) => sum + weight * Math.exp(-age / trapLifetime), 0);
  for (let i = 0; i < left.length; i++) caught[i] = caught[i]! + weight * train * left[i]!;
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
