import { rmSync } from "node:fs";
import { join } from "node:path";
import { deflateSync } from "node:zlib";
import type { Analysis } from "../outcome/analysis.ts";
import { framesCsv } from "./csv.ts";
import { type Figures, renderFigures } from "./figures.ts";
import { renderReport } from "./html.ts";
import { resultJson } from "./json.ts";
import { viewerData } from "./viewer-data.ts";
import { writeWhole } from "./write-whole.ts";

/** Every name that a run may write; nothing else in the folder is ever touched. */
const OWN_FILES = [
  "result.json",
  "frames.csv",
  "report.html",
  "figures/spread.svg",
  "figures/light.svg",
  "figures/profiles.svg",
] as const;

/**
 * Makes every file of the main job and writes them to `directory`: result.json, frames.csv, report.html, figures.
 * @param draw makes the figures; a thread's, where one was started in time
 * @returns the paths written
 * @throws InputFault where the folder cannot be written
 */
export async function writeReports(
  analysis: Analysis,
  directory: string,
  draw: (analysis: Analysis) => Promise<Figures> = renderFigures,
): Promise<string[]> {
  const drawn = draw(analysis);
  const result = resultJson(analysis.result);
  const frames = framesCsv(analysis.result.frames);
  // level 3: a third of the time of the default for 3 % more bytes
  const viewer = viewerData(analysis, (bytes) => deflateSync(bytes, { level: 3 }).toString("base64"));
  const figures = await drawn;
  const files = new Map<string, string | Uint8Array>([
    ["result.json", result],
    ["frames.csv", frames],
    ["report.html", renderReport(analysis, figures, viewer)],
    ["figures/spread.svg", figures.spread],
    ["figures/light.svg", figures.light],
    ["figures/profiles.svg", figures.profiles],
  ]);
  return writeResult(directory, files);
}

/**
 * Writes a result so that it appears whole or not at all ({@link writeWhole}). Of an older result, files that this
 * one does not have are removed; other files are left.
 */
export function writeResult(directory: string, files: ReadonlyMap<string, string | Uint8Array>): string[] {
  const written = writeWhole(directory, files);
  for (const name of OWN_FILES) if (!files.has(name)) rmSync(join(directory, name), { force: true });
  return written;
}
