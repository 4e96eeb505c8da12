import type { FrameFlag } from "../frame/spot.ts";
import type { DecayLaw, FrameRow, Quantity, Result, TransportLaw } from "../outcome/result.ts";
import { between, concise, superscript, upperLimit } from "./notation.ts";

/** The words that the terminal, the figures and the page share, so that they cannot drift apart. */

export type Level = Result["verdict"]["level"];
export type QuantityName = keyof Result["quantities"];

export const VERDICT: Readonly<Record<Level, { word: string; mark: string; sentence: string }>> = {
  sound: { word: "Sound", mark: "✓", sentence: "No check speaks against these numbers." },
  caution: { word: "Caution", mark: "!", sentence: "Quote these numbers only with the reservations below." },
  unsound: {
    word: "Unsound",
    mark: "✕",
    sentence: "Do not quote these numbers: the recording does not support them.",
  },
};

export const QUANTITY: Readonly<Record<QuantityName, { symbol: string; name: string; missing: string }>> = {
  diffusion_coefficient: { symbol: "D", name: "Diffusion coefficient", missing: "not found" },
  lifetime: { symbol: "τ", name: "Lifetime", missing: "not given: no law of decay fits the light" },
  diffusion_length: { symbol: "L", name: "Diffusion length", missing: "not given: it needs a lifetime" },
  mobility: { symbol: "μ", name: "Equivalent mobility", missing: "not given: no sample.temperature stated" },
};

export const TRANSPORT_LAW: Readonly<Record<TransportLaw, string>> = {
  line: "straight line",
  power_law: "power law",
  arrest: "law of arrest",
  broken_line: "broken line",
};

export const DECAY_LAW: Readonly<Record<DecayLaw, string>> = {
  exponential: "one exponential",
  two_exponentials: "two exponentials",
  stretched: "stretched exponential",
  annihilation: "decay with annihilation",
};

export type CandidateName = NonNullable<Result["field"]>["preferred"];

export const CANDIDATE: Readonly<Record<CandidateName, string>> = {
  diffusion: "diffusion",
  annihilation: "diffusion and annihilation",
  capture: "diffusion and capture into traps",
  annihilation_and_capture: "diffusion, annihilation and capture",
  repulsion: "diffusion and repulsion",
  annihilation_and_repulsion: "diffusion, annihilation and repulsion",
};

const FROM: Readonly<Record<Quantity["from"], string>> = {
  ...TRANSPORT_LAW,
  field: "whole-stack fit",
  decay: "decay of the light",
  outcome: "other numbers",
};

/** In the order in which one reason is shown where a frame has several. */
export const FLAG: Readonly<Record<FrameFlag, string>> = {
  "before-pulse": "before the pulse",
  empty: "empty",
  saturated: "saturated",
  "too-dim": "too dim",
  "fit-failed": "spot fit failed",
  "trap-dominated": "trap-dominated",
  "outside-window": "outside the window",
};

const FLAG_ORDER = Object.keys(FLAG) as FrameFlag[];

/** The one reason shown for a frame that was set aside; null where it has none. */
export function mainFlag(row: FrameRow): FrameFlag | null {
  return FLAG_ORDER.find((flag) => row.flags.includes(flag)) ?? null;
}

/** How many frames each main reason sets aside, most frequent first. */
export function flagCounts(frames: readonly FrameRow[]): [flag: FrameFlag, count: number][] {
  return FLAG_ORDER.map((flag): [FrameFlag, number] => [
    flag,
    frames.filter((row) => mainFlag(row) === flag).length,
  ])
    .filter(([, count]) => count > 0)
    .sort((a, b) => b[1] - a[1]);
}

/** A unit as printed: "cm^2/(V s)" becomes "cm²/(V s)", "um" becomes "µm". */
export function unitText(unit: string): string {
  return unit.replace(/\^(-?\d+)/g, (_, power: string) => superscript(power)).replace(/\bum\b/g, "µm");
}

/** "0.512(34)" or, for an upper limit, "< 0.21"; without the unit. */
export function quantityText(quantity: Quantity): string {
  return quantity.upper_limit === true ? upperLimit(quantity.value) : concise(quantity.value, quantity.u);
}

/** "0.445 to 0.579", or for an upper limit which limit it is. */
export function intervalText(quantity: Quantity): string {
  if (quantity.upper_limit === true) return "one-sided limit";
  return between(quantity.interval95[0], quantity.interval95[1], quantity.u);
}

/** A finding as a sentence: a capital first, a full stop last. */
export function asSentence(text: string): string {
  const begun = text.charAt(0).toUpperCase() + text.slice(1);
  return /[.!?]$/.test(begun) || begun === "" ? begun : `${begun}.`;
}

/** A file's name without the folders it lies in. */
export function baseName(file: string): string {
  return file.split(/[\\/]/).at(-1) || file;
}

/** "1 frame", "12 frames". */
export function counted(count: number, noun: string): string {
  return `${count} ${noun}${count === 1 ? "" : "s"}`;
}

/** Which fit a quantity comes from. */
export function sourceText(name: QuantityName, quantity: Quantity): string {
  if (quantity.from !== "outcome") return FROM[quantity.from];
  return name === "mobility" ? "D and temperature" : "D and the decay";
}

/** A probability to two digits, "0.43", or "< 0.001". */
export function probability(p: number): string {
  return p < 0.001 ? "< 0.001" : p.toFixed(p < 0.1 ? 3 : 2);
}
