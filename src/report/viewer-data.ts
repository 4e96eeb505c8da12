import type { Spot } from "../frame/spot.ts";
import type { Analysis } from "../outcome/analysis.ts";
import type { FrameRow } from "../outcome/result.ts";
import type { Stack } from "../stack/stack.ts";
import { darkCells, type Region, regionOf, sumCells } from "./light-map.ts";
import { concise, plain } from "./notation.ts";
import { type WholeData, wholeCells } from "./viewer-whole.ts";
import { FLAG } from "./wording.ts";

/** Packs bytes for the page: the zlib format (RFC 1950) that its DecompressionStream("deflate") reads, as base64. */
export type Pack = (bytes: Uint8Array) => string;

/** What the page's frame viewer is handed as JSON; the cells themselves follow as base64. */
export interface ViewerData {
  readonly kind: Stack["kind"];
  readonly region: Region;
  /** µm */
  readonly pixel: number;
  readonly excessNoise: number;
  /** Variance of one pixel in the dark, photons². */
  readonly darkVariance: number;
  /** A cell holds low + step·k photons, k a 16-bit number: all low bytes first, then all high bytes. */
  readonly low: number;
  readonly step: number;
  readonly frames: readonly ViewerFrame[];
  /** 1 where every frame is shown, 2 where every second one is, … */
  readonly stride: number;
  /** Place in `frames` that is shown first. */
  readonly first: number;
  /** The whole-stack model beside each frame's spot, where one was fitted. */
  readonly whole: WholeData | null;
}

export interface ViewerFrame {
  readonly title: string;
  /** Delay in ns, as printed. */
  readonly delay: string;
  /** N, x, y, Σxx, Σxy, Σyy, B as in a spot; null without one. */
  readonly spot: readonly number[] | null;
  readonly used: boolean;
  /** Pixels that the fits left out as hot, dead or struck. */
  readonly struck: number;
  readonly flags: string;
  readonly numbers: readonly (readonly [label: string, text: string])[];
}

/** Everything that the viewer's part of the page holds. */
export interface Viewer {
  readonly data: ViewerData;
  /** The frames' cells, packed. */
  readonly cells: string;
  /** The whole-stack model's cells, packed; empty without one. */
  readonly wholeCells: string;
}

/** Cells in the whole page at most; at 4 to 6 bits a cell, and 5 more for a whole-stack model, the report stays under 2 MB. */
const MOST_CELLS = 800_000;
const MOST_SIDE = 64;
const LEAST_SIDE = 32;
const MOST_TRACE_CELLS = 160;

/** Packs the frames for the page: cropped to the spot, cells added up, quantised to a quarter of their noise. */
export function viewerData(analysis: Analysis, pack: Pack): Viewer {
  const { stack, spots, result } = analysis;
  const side = Math.min(MOST_SIDE, Math.max(LEAST_SIDE, Math.floor(Math.sqrt(MOST_CELLS / stack.frames))));
  const region = regionOf(stack, spots, stack.kind === "trace" ? MOST_TRACE_CELLS : side);
  const most = Math.max(1, Math.floor(MOST_CELLS / (region.columns * region.rows)));
  const stride = Math.max(1, Math.ceil(stack.frames / most));
  const shown = result.frames.filter((_, place) => place % stride === 0);
  const values = readCells(stack, region, shown);
  const { low, step, bytes } = quantise(values, leastStep(stack, spots, region));
  const whole = wholeCells(analysis, region, shown);
  const { detector, space } = stack.acquisition;
  const firstUsed = shown.findIndex((row) => row.used);
  return {
    data: {
      kind: stack.kind,
      region,
      pixel: space.pixel.value,
      excessNoise: detector.excessNoise,
      darkVariance: (detector.readNoise / detector.gain) ** 2,
      low,
      step,
      stride,
      frames: shown.map((row) => describeFrame(row, spots[row.index] ?? null, result.frames.length)),
      first: Math.max(0, firstUsed),
      whole: whole?.data ?? null,
    },
    cells: pack(bytes),
    wholeCells: whole === null ? "" : pack(whole.bytes),
  };
}

/** Photons of every cell of every shown frame: (counts − counts in the dark) / gain. */
function readCells(stack: Stack, region: Region, shown: readonly FrameRow[]): Float64Array {
  const size = region.columns * region.rows;
  const values = new Float64Array(size * shown.length);
  const counts = new Float64Array(stack.height * stack.width);
  const dark = darkCells(stack, region);
  const { gain } = stack.acquisition.detector;
  shown.forEach((row, place) => {
    stack.read(row.index, counts);
    sumCells(counts, stack.width, region, values, place * size);
  });
  for (let start = 0; start < values.length; start += size) {
    for (let k = 0; k < size; k++) values[start + k] = ((values[start + k] ?? 0) - (dark[k] ?? 0)) / gain;
  }
  return values;
}

/** A quarter of the noise of a dark cell; in counting, a whole number of the smallest steps of the detector. */
function leastStep(stack: Stack, spots: readonly (Spot | null)[], region: Region): number {
  const { gain, readNoise, excessNoise } = stack.acquisition.detector;
  const backgrounds = spots
    .flatMap((spot) => (spot === null ? [] : [Math.max(0, spot.background)]))
    .sort((a, b) => a - b);
  const background = backgrounds[Math.floor(backgrounds.length / 2)] ?? 0;
  const noise = Math.sqrt(region.bin * region.binDown * (excessNoise * background + (readNoise / gain) ** 2));
  const count = 1 / gain;
  return readNoise > 0 || stack.dark !== null
    ? Math.max(noise, 0.1 * count) / 4
    : count * Math.max(1, Math.round(noise / 4 / count));
}

function quantise(values: Float64Array, least: number): { low: number; step: number; bytes: Uint8Array } {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < values.length; k++) {
    const value = values[k] ?? 0;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  const step = Math.max(least, (high - low) / 65_535);
  const bytes = new Uint8Array(2 * values.length);
  for (let k = 0; k < values.length; k++) {
    const level = Math.min(65_535, Math.floor(((values[k] ?? 0) - low) / step + 0.5));
    bytes[k] = level & 255;
    bytes[values.length + k] = level >> 8;
  }
  return { low, step, bytes };
}

function describeFrame(row: FrameRow, spot: Spot | null, total: number): ViewerFrame {
  const numbers: [string, string][] = [["Delay", `${plain(row.delay_ns)} ns`]];
  const add = (label: string, value: number | null, u: number | null, unit: string) => {
    if (value !== null) numbers.push([label, `${u === null ? plain(value, 4) : concise(value, u)}${unit}`]);
  };
  add("Light", row.photons, row.u_photons, " photons");
  add("Variance per axis", row.variance_um2, row.u_variance_um2, " µm²");
  add("MSD", row.msd_um2, row.u_msd_um2, " µm²");
  add("Centre x", row.x_um, null, " µm");
  add("Centre y", row.y_um, null, " µm");
  add("Background", row.background, null, " photons per pixel");
  add("Reduced χ²", row.reduced_chi2, null, "");
  if (row.hot_pixels > 0) numbers.push(["Hot pixels left out", String(row.hot_pixels)]);
  return {
    title: `Frame ${row.index} (0 to ${total - 1}), ${plain(row.delay_ns)} ns`,
    delay: plain(row.delay_ns),
    spot:
      spot === null ? null : [spot.photons, ...spot.centre, ...spot.covariance, spot.background].map(short),
    used: row.used,
    struck: row.hot_pixels,
    flags: row.flags.map((flag) => FLAG[flag]).join(", "),
    numbers,
  };
}

/** Seven digits are enough to draw with. */
function short(value: number): number {
  return Number(value.toPrecision(7));
}
