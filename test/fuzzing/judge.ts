import { parse } from "smol-toml";
import { readPlainTiff } from "./plain-reader.ts";
import type { TiffFile } from "./tiff-file.ts";

/** What the program says a stack holds. */
export interface Reading {
  readonly shape: readonly number[];
  readonly sum: number;
}

/**
 * Says why a reading of a damaged TIFF is wrong, or null where it is right.
 *
 * Right is what the second reader finds; where that has no opinion, only what the whole file held.
 */
export function misreadTiff(bytes: Buffer, whole: TiffFile, got: Reading): string | null {
  const right = readPlainTiff(bytes) ?? readPlainTiff(whole.bytes);
  if (right === null) return "the whole file is beyond the second reader";
  const shape = right.frames === 1 ? [right.height, right.width] : [right.frames, right.height, right.width];
  const near = Math.abs(got.sum - right.sum) <= 1e-9 * Math.abs(right.sum);
  if (near && got.shape.join() === shape.join()) return null;
  return `read ${got.shape.join("×")} with sum ${got.sum} where ${shape.join("×")} with sum ${right.sum} is right`;
}

/**
 * Says why a damaged acquisition file that was accepted should not have been, or was not taken at its word; null
 * where all is well: it is TOML, and each value in it is reported as it stands in the file.
 *
 * @param settings what the program reports as used, by dotted key
 */
export function misreadToml(
  text: string,
  settings: Readonly<Record<string, { readonly text: string; readonly from: string }>>,
): string | null {
  for (const [key, value] of leaves(parse(text), "")) {
    const setting = settings[key];
    if (setting === undefined) return `${key} was accepted and not used`;
    if (setting.from !== "acquisition file") return `${key} is said to come from ${setting.from}`;
    if (plain(setting.text) !== plain(String(value)))
      return `${key} is ${value} and was reported as ${setting.text}`;
  }
  return null;
}

function leaves(value: unknown, path: string): [key: string, value: unknown][] {
  const isTable =
    typeof value === "object" && value !== null && !Array.isArray(value) && !(value instanceof Date);
  if (!isTable) return [[path, value]];
  return Object.entries(value).flatMap(([key, inner]) => leaves(inner, path === "" ? key : `${path}.${key}`));
}

const plain = (text: string): string => text.replace(/[\s[\]]/g, "").toLowerCase();
