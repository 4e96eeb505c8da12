import type { Spot } from "../frame/spot.ts";
import type { Stack } from "../stack/stack.ts";

/** The part of the picture that is shown, in pixels, and how many pixels a side make one shown cell. */
export interface Region {
  readonly left: number;
  readonly top: number;
  /** Shown cells across and down. */
  readonly columns: number;
  readonly rows: number;
  readonly bin: number;
  /** Pixels of a cell down: `bin` on a map, 1 on a trace. */
  readonly binDown: number;
}

/** Half-width of the region in standard deviations of the widest spot. */
const REACH = 4.5;

/**
 * The square around the spots that holds the widest of them to 4.5 standard deviations (a trace: the stretch of the
 * line), cut into at most `most` cells a side. Without a spot it is the whole picture.
 */
export function regionOf(stack: Stack, spots: readonly (Spot | null)[], most: number): Region {
  const pixel = stack.acquisition.space.pixel.value;
  const found = spots.filter((spot) => spot !== null);
  const sigmas = found
    .map((spot) => Math.sqrt(Math.max(spot.covariance[0], spot.covariance[2])))
    .sort((a, b) => a - b);
  // the 90th percentile, as the faintest frames can have absurd widths
  const sigma = sigmas[Math.floor(0.9 * (sigmas.length - 1))];
  const half = sigma === undefined ? Number.POSITIVE_INFINITY : Math.max(8, (REACH * sigma) / pixel);
  const x = span(median(found.map((spot) => spot.centre[0])) / pixel, half, stack.width);
  const y = span(median(found.map((spot) => spot.centre[1])) / pixel, half, stack.height);
  const bin = Math.max(1, Math.ceil(Math.max(x.length, y.length) / most));
  const binDown = stack.height === 1 ? 1 : bin;
  return {
    left: x.start,
    top: y.start,
    columns: Math.max(1, Math.floor(x.length / bin)),
    rows: Math.max(1, Math.floor(y.length / binDown)),
    bin,
    binDown,
  };
}

function span(centre: number, half: number, size: number): { start: number; length: number } {
  if (!Number.isFinite(centre) || !Number.isFinite(half)) return { start: 0, length: size };
  const start = Math.min(size - 1, Math.max(0, Math.floor(centre - half)));
  const end = Math.max(start + 1, Math.min(size, Math.ceil(centre + half) + 1));
  return { start, length: end - start };
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.floor(sorted.length / 2)] ?? Number.NaN;
}

/** Counts of each cell in the dark: the dark frame's, or the offset of its pixels. */
export function darkCells(stack: Stack, region: Region): Float64Array {
  const cells = new Float64Array(region.columns * region.rows);
  if (stack.dark === null) return cells.fill(stack.acquisition.detector.offset * region.bin * region.binDown);
  sumCells(stack.dark, stack.width, region, cells, 0);
  return cells;
}

/** Adds up the pixels of a frame in each cell of a region, into `into` from place `at` on. */
export function sumCells(
  frame: Float64Array,
  width: number,
  region: Region,
  into: Float64Array,
  at: number,
): void {
  const { left, top, columns, rows, bin, binDown } = region;
  for (let y = 0; y < rows * binDown; y++) {
    const row = at + Math.floor(y / binDown) * columns;
    let pixel = (top + y) * width + left;
    for (let column = 0; column < columns; column++) {
      let sum = 0;
      for (const end = pixel + bin; pixel < end; pixel++) sum += frame[pixel] ?? 0;
      into[row + column] = (into[row + column] ?? 0) + sum;
    }
  }
}

/**
 * A spot's light in one pixel, without its background: N·a²/(2π√|Σ|)·exp(−½ (r−c)ᵀΣ⁻¹(r−c)), and N·a/√(2πΣxx)·… on a
 * trace, at the centre (x, y) of the pixel in µm.
 */
export function spotLight(spot: Spot, kind: Stack["kind"], pixel: number, x: number, y: number): number {
  const [xx, xy, yy] = spot.covariance;
  const dx = x - spot.centre[0];
  if (kind === "trace") {
    return ((spot.photons * pixel) / Math.sqrt(2 * Math.PI * xx)) * Math.exp(-(dx * dx) / (2 * xx));
  }
  const dy = y - spot.centre[1];
  const determinant = xx * yy - xy * xy;
  const form = (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant;
  return ((spot.photons * pixel * pixel) / (2 * Math.PI * Math.sqrt(determinant))) * Math.exp(-form / 2);
}
