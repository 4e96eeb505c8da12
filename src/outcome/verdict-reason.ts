import type { Result } from "./result.ts";

export type Reason = Result["verdict"]["reasons"][number];
export type Level = Reason["level"];

export function reason(level: Level, code: string, text: string, advice: string): Reason {
  return { level, code, text, advice };
}

/** "0.57 ± 0.01": the uncertainty to one digit, the value to the same place. */
export function plusMinus(value: number, u: number): string {
  const shown = Number(u.toPrecision(1));
  if (!(shown > 0)) return value.toPrecision(3);
  const places = Math.max(-Math.floor(Math.log10(shown)), 0);
  return places > 6
    ? `${value.toPrecision(3)} ± ${u.toPrecision(1)}`
    : `${value.toFixed(places)} ± ${shown.toFixed(places)}`;
}

/** Reasons with the worst first, and the worst one's level as the verdict's; notes alone leave it sound. */
export function levelOf(reasons: readonly Reason[]): Result["verdict"] {
  const rank: Record<Level, number> = { unsound: 0, caution: 1, note: 2 };
  const sorted = [...reasons].sort((a, b) => rank[a.level] - rank[b.level]);
  const worst = sorted[0]?.level ?? "note";
  return { level: worst === "note" ? "sound" : worst, reasons: sorted };
}
