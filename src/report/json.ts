import type { Result } from "../outcome/result.ts";

const LINE = 110;

/**
 * result.json as text: indented, with whatever fits on one line kept there, and one line a frame.
 * @throws RangeError naming the key if a number is not finite, which JSON would turn into null without a word
 */
export function resultJson(result: Result): string {
  refuseNonFinite(result, "result");
  return `${format(result, "")}\n`;
}

function refuseNonFinite(value: unknown, path: string): void {
  if (typeof value === "number" && !Number.isFinite(value)) {
    throw new RangeError(`${path} is not a finite number: ${value}`);
  }
  if (typeof value !== "object" || value === null) return;
  for (const [key, inner] of Object.entries(value)) refuseNonFinite(inner, `${path}.${key}`);
}

function format(value: unknown, indent: string): string {
  if (typeof value !== "object" || value === null) return JSON.stringify(value);
  const line = oneLine(value);
  if (indent.length + line.length <= LINE) return line;
  const deeper = `${indent}  `;
  if (Array.isArray(value)) {
    const items = value.map((item) => deeper + (isRow(item) ? oneLine(item) : format(item, deeper)));
    return `[\n${items.join(",\n")}\n${indent}]`;
  }
  const entries = defined(value).map(
    ([key, inner]) => `${deeper}${JSON.stringify(key)}: ${format(inner, deeper)}`,
  );
  return `{\n${entries.join(",\n")}\n${indent}}`;
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
