import { InputFault } from "./fault.ts";
import type { WrittenSettings } from "./settings.ts";
import { KINDS, plainUnit } from "./units.ts";
import { numbersOf, originName, quantityOf, textOf, valueFault } from "./values.ts";

/** Fewer frames cannot tell a spreading spot from a still one with a wrong width. */
const FEWEST_FRAMES = 3;

/** The time base as written. */
export interface WrittenDelays {
  /** Gate opening of every frame, ns. */
  readonly delays: readonly number[];
  /** Relative standard uncertainty of the time base. */
  readonly relativeU: number;
}

/**
 * Delays of all frames in ns, from first and step or from the list, or null where neither is written.
 * @throws InputFault when they do not match the frames, repeat or do not rise, or contradict each other
 */
export function delaysOf(settings: WrittenSettings, frames: number): WrittenDelays | null {
  const listed = numbersOf(settings, "time.delays");
  const relativeU = quantityOf(settings, "time.uncertainty")?.value ?? null;
  if (listed !== null) return { delays: fromList(settings, listed, frames), relativeU: relativeU ?? 0 };
  const unit = settings.values.get("time.unit");
  if (unit !== undefined) throw missing(settings, "time.delays", "time.unit stands alone");
  const step = quantityOf(settings, "time.step");
  const first = quantityOf(settings, "time.first");
  if (step === null) {
    if (first !== null) throw missing(settings, "time.step", "time.first stands alone");
    return null;
  }
  if (relativeU !== null && step.u > 0) {
    throw valueFault(settings, "time.uncertainty", "contradicts the uncertainty that time.step carries");
  }
  // Counted from the pulse, not summed up, so that rounding does not pile up.
  const delays = Array.from({ length: frames }, (_, i) => (first?.value ?? 0) + i * step.value);
  if (firstFall(delays) > 0 || !Number.isFinite(delays.at(-1))) {
    throw valueFault(settings, "time.step", "gives delays too close or too large to tell apart");
  }
  return { delays, relativeU: relativeU ?? step.u / step.value };
}

function fromList(settings: WrittenSettings, listed: readonly number[], frames: number): number[] {
  const unit = textOf(settings, "time.unit");
  if (unit === null) throw missing(settings, "time.unit", "time.delays has no unit");
  const { factors } = KINDS.time;
  const factor = Object.hasOwn(factors, plainUnit(unit)) ? factors[plainUnit(unit)] : undefined;
  if (factor === undefined) {
    throw valueFault(settings, "time.unit", `is not a time (${Object.keys(factors).join(", ")})`);
  }
  if (listed.length !== frames) {
    throw valueFault(settings, "time.delays", `lists ${listed.length} delays for ${frames} frames`);
  }
  const fall = firstFall(listed);
  if (fall > 0) {
    const wrong = listed[fall] === listed[fall - 1] ? "repeats" : "does not rise";
    throw valueFault(
      settings,
      "time.delays",
      `${wrong} at frame ${fall + 1} (${listed[fall]} after ${listed[fall - 1]})`,
    );
  }
  const delays = listed.map((delay) => delay * factor);
  if (!delays.every(Number.isFinite)) throw valueFault(settings, "time.delays", "holds too large a number");
  return delays;
}

/** The first place whose delay is not above the one before, or −1. */
function firstFall(delays: readonly number[]): number {
  return delays.findIndex((delay, i) => i > 0 && !(delay > delays[i - 1]!));
}

/** @throws InputFault when there are fewer frames than a fit needs */
export function checkFrameCount(file: string, frames: number): void {
  if (frames >= FEWEST_FRAMES) return;
  const count = frames === 1 ? "1 frame" : `${frames} frames`;
  throw new InputFault(
    `${file} holds ${count}, and at least ${FEWEST_FRAMES} delays are needed; give the whole recording`,
    { file },
  );
}

function missing(settings: WrittenSettings, key: string, why: string): InputFault {
  const file = originName(settings, settings.values.get("time.first") ?? settings.values.get("time.delays"));
  const example = { "time.delays": "delays = [0, 0.5, 2]", "time.step": 'step = "0.25 ns"' }[key];
  return new InputFault(`${file}: ${why}; add ${example ?? 'unit = "ns"'} under [time]`, {
    file,
    where: key,
  });
}
