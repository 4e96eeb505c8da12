import type { Result } from "../outcome/result.ts";
import { concise, plain } from "./notation.ts";

type Ranged = NonNullable<Result["field"]>["D"];

/** Digits of a number whose uncertainty is not known, and of the ends of a lopsided interval. */
const DIGITS = 3;

/**
 * "0.80(2) /ns"; with the interval where u says too little, "0.020(3) /ns (95 %: 0.014 to 0.027 /ns)"; where the data set
 * one end only, "at least 12 /ns (95 %, not determined from above)".
 */
export function rangedText(
  { value, u, interval95: [low, high], interval_from }: Ranged,
  unit: string,
): string {
  const short = (x: number): string => plain(Number(x.toPrecision(DIGITS)));
  if (u === null) return `${short(value)} ${unit} (not determined)`;
  if (low === null && high === null) return `${short(value)} ${unit} (not determined from below or above)`;
  if (low === null) return `at most ${short(high!)} ${unit} (95 %, not determined from below)`;
  if (high === null) return `at least ${short(low)} ${unit} (95 %, not determined from above)`;
  const text = `${concise(value, u)} ${unit}`;
  return interval_from === "profile" ? `${text} (95 %: ${short(low)} to ${short(high)} ${unit})` : text;
}
