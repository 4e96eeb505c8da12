import type { Acquisition } from "./acquisition.ts";

/**
 * A recording as the analysis sees it: frames in order of delay, each a row-major grid of stored counts.
 *
 * A map has frames of height × width pixels. A streak trace has frames one pixel high: one line of space for each
 * step of time, however the camera laid it out.
 */
export interface Stack {
  readonly kind: "map" | "trace";
  readonly frames: number;
  readonly height: number;
  readonly width: number;
  /**
   * Copies frame `index` (0-based) into `into` as stored counts, before any correction.
   * @param into length height·width, row-major (y, x)
   */
  read(index: number, into: Float64Array): void;
  /** Dark frame in stored counts, height·width, subtracted in place of the constant offset; null without one. */
  readonly dark: Float64Array | null;
  readonly acquisition: Acquisition;
  /** What the result's `input` block says. */
  readonly source: {
    readonly file: string;
    readonly sha256: string;
    readonly shape: readonly number[];
    readonly axes: string;
  };
}
