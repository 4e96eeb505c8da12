import type { Analysis } from "../outcome/analysis.ts";
import type { FrameRow } from "../outcome/result.ts";
import { type Region, sumCells } from "./light-map.ts";
import { CANDIDATE } from "./wording.ts";

/** What the page is told of the whole-stack model; its cells follow as base64. */
export interface WholeData {
  /** The candidate in words. */
  readonly name: string;
  /** Whether the headline comes from it: the model that is shown first. */
  readonly adopted: boolean;
  /** A level stands for so many photons of a cell's standard deviation. */
  readonly step: number;
  /** Places in the shown frames that the model leaves out. */
  readonly leftOut: readonly number[];
}

/**
 * Half a step moves a residual by 1/100 of a standard deviation, on light and in the dark alike: where all cells of an
 * even background err alike, the sum of 600 of them errs by a quarter.
 */
const STEPS_PER_DEVIATION = 100;

/**
 * The preferred whole-stack model's cells of the shown frames; null where none was fitted.
 *
 * A cell of mean m is held as the level √(excess·m + dark)/step: in the root of the variance all light needs steps of
 * one size (Anscombe, Biometrika 35 (1948) 246), and few levels do. Of each level stands the difference to the same
 * cell of the frame before, modulo 2¹⁶: light changes slowly from frame to frame, and small numbers pack well. All low
 * bytes come first, then all high bytes.
 */
export function wholeCells(
  { stack, wholeLight, result }: Analysis,
  region: Region,
  shown: readonly FrameRow[],
): { data: WholeData; bytes: Uint8Array } | null {
  const { field } = result;
  if (wholeLight === null || field === null) return null;
  const size = region.columns * region.rows;
  const means = new Float64Array(size * shown.length);
  const picture = new Float64Array(stack.height * stack.width);
  const leftOut: number[] = [];
  shown.forEach((row, place) => {
    if (wholeLight(row.index, picture)) sumCells(picture, stack.width, region, means, place * size);
    else leftOut.push(place);
  });
  const { excessNoise, readNoise, gain } = stack.acquisition.detector;
  const dark = region.bin * region.binDown * (readNoise / gain) ** 2;
  const deviations = means.map((mean) => Math.sqrt(excessNoise * Math.max(0, mean) + dark));
  const most = deviations.reduce((a, b) => Math.max(a, b), 0);
  const step = Math.max(excessNoise / STEPS_PER_DEVIATION, most / 65_535);
  const bytes = new Uint8Array(2 * deviations.length);
  const level = (k: number): number => (k < 0 ? 0 : Math.round((deviations[k] ?? 0) / step));
  for (let k = 0; k < deviations.length; k++) {
    const difference = (level(k) - level(k - size)) & 65_535;
    bytes[k] = difference & 255;
    bytes[deviations.length + k] = difference >> 8;
  }
  return { data: { name: CANDIDATE[field.preferred], adopted: field.adopted, step, leftOut }, bytes };
}
