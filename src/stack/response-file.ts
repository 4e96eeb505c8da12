import type { Response } from "./acquisition.ts";
import { InputFault } from "./fault.ts";

/**
 * Reads an instrument response: one line a sample, delay in ns and counts, separated by comma, semicolon, tab or
 * space; one heading line and lines after # are passed over.
 *
 * @throws InputFault naming file and line
 */
export function readResponse(text: string, file: string): Response {
  const delays: number[] = [];
  const counts: number[] = [];
  for (const [index, line] of text
    .replace(/^\ufeff/, "")
    .split(/\r?\n/)
    .entries()) {
    const cells = line
      .split("#")[0]!
      .trim()
      .split(/\s*[,;\t]\s*|\s+/);
    if (cells.length === 1 && cells[0] === "") continue;
    const [delay, count] = cells.map((cell) => (cell === "" ? Number.NaN : Number(cell)));
    const numeric = cells.length >= 2 && Number.isFinite(delay) && Number.isFinite(count);
    if (!numeric && delays.length === 0 && /[a-z]/i.test(line)) continue;
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
  return { kind: "sampled", delays, counts };
}
