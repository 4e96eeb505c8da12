import type { Response } from "./acquisition.ts";
import { InputFault } from "./fault.ts";
import { KINDS, plainUnit } from "./units.ts";

/**
 * Reads an instrument response: one line a sample, delay in ns and counts, separated by semicolon or
 * tab, else by comma or space. What follows # is passed over, and so is a heading but for another unit of time in it.
 *
 * @throws InputFault naming file and line
 */
export function readResponse(text: string, file: string): Response {
  const delays: number[] = [];
  const counts: number[] = [];
  let unit = 1;
  for (const [index, line] of text
    .replace(/^\ufeff/, "")
    .split(/\r?\n/)
    .entries()) {
    const cells = cellsOf(line);
    if (cells.length === 1 && cells[0] === "") continue;
    const [delay, count] = cells.map((cell) => (cell === "" ? Number.NaN : Number(cell)));
    const numeric = cells.length === 2 && Number.isFinite(delay) && Number.isFinite(count);
    if (!numeric && delays.length === 0 && /[a-z]/i.test(line)) {
      unit = headingUnit(line) ?? unit;
      continue;
    }
    const fault = (wrong: string) =>
      new InputFault(`${file}, line ${index + 1}, ${wrong}; give delay in ns and counts on each line`, {
        file,
        where: `line ${index + 1}`,
      });
    if (!numeric) throw fault("does not hold two numbers");
    if (count! < 0) throw fault("has counts below zero");
    if (delays.length > 0 && !(delay! > delays.at(-1)!)) throw fault("has a delay that does not rise");
    delays.push(delay!);
    counts.push(count!);
  }
  if (delays.length < 3 || !counts.some((count) => count > 0)) {
    throw new InputFault(
      `${file} holds no instrument response; give at least three lines with delay in ns and counts`,
      { file },
    );
  }
  return { kind: "sampled", delays: delays.map((delay) => delay * unit), counts };
}

/** Nanoseconds in the unit of time that a heading names, as in "delay (ps)" or "time/ps"; null where it names none. */
function headingUnit(line: string): number | null {
  const word = /[(/[_\s](fs|ps|ns|us|µs|μs|ms|s)(?:[)\]\s,;]|$)/.exec(line)?.[1];
  return word === undefined ? null : (KINDS.time.factors[plainUnit(word)] ?? null);
}

/** Where a semicolon or tab separates, a comma may be a decimal one: it is left standing, and no number then. */
function cellsOf(line: string): string[] {
  const content = line.split("#")[0]!.trim();
  return /[;\t]/.test(content) ? content.split(/\s*[;\t]\s*/) : content.split(/\s*,\s*|\s+/);
}
