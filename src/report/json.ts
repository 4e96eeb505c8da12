import type { Result } from "../outcome/result.ts";

const LINE = 110;
/** No more values than these fit on a line, which saves trying. */
const MOST_ON_A_LINE = 24;

/**
 * result.json as text: indented, with whatever fits on one line kept there, and one line a frame.
 * @throws RangeError naming the key if a number is not finite, which JSON would turn into null without a word
 */
export function resultJson(result: Result): string {
  const path = findNonFinite(result);
  if (path !== null) throw new RangeError(`result${path} is not a finite number`);
  return `${format(result, "")}\n`;
}

/** The path of the first number that is not finite, as ".key.key"; null where there is none. */
function findNonFinite(value: unknown): string | null {
  if (typeof value === "number") return Number.isFinite(value) ? null : "";
  if (typeof value !== "object" || value === null) return null;
  for (const key in value) {
    const path = findNonFinite((value as Record<string, unknown>)[key]);
    if (path !== null) return `.${key}${path}`;
  }
  return null;
}

function format(value: unknown, indent: string): string {
  if (typeof value !== "object" || value === null) return JSON.stringify(value);
  if (leaves(value, MOST_ON_A_LINE) <= MOST_ON_A_LINE) {
    const line = oneLine(value);
    if (indent.length + line.length <= LINE) return line;
  }
  const deeper = `${indent}  `;
  if (Array.isArray(value)) {
    const items = value.map((item) => deeper + (isRow(item) ? JSON.stringify(item) : format(item, deeper)));
    return `[\n${items.join(",\n")}\n${indent}]`;
  }
  const entries = defined(value).map(
    ([key, inner]) => `${deeper}${JSON.stringify(key)}: ${format(inner, deeper)}`,
  );
  return `{\n${entries.join(",\n")}\n${indent}}`;
}

/** How many plain values an object holds, counted no further than just above `most`. */
function leaves(value: unknown, most: number): number {
  if (typeof value !== "object" || value === null) return 1;
  let count = 0;
  for (const inner of Object.values(value)) {
    count += leaves(inner, most - count);
    if (count > most) break;
  }
  return count;
}

/** A line of a table: an object of plain values and short lists of them. */
function isRow(value: unknown): boolean {
  if (typeof value !== "object" || value === null) return false;
  return Object.values(value).every(
    (inner) => typeof inner !== "object" || inner === null || Array.isArray(inner),
  );
}

function oneLine(value: unknown): string {
  if (typeof value !== "object" || value === null) return JSON.stringify(value);
  if (Array.isArray(value)) return `[${value.map(oneLine).join(", ")}]`;
  const entries = defined(value).map(([key, inner]) => `${JSON.stringify(key)}: ${oneLine(inner)}`);
  return entries.length === 0 ? "{}" : `{ ${entries.join(", ")} }`;
}

function defined(value: object): [string, unknown][] {
  return Object.entries(value).filter(([, inner]) => inner !== undefined);
}
