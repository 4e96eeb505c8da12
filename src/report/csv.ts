import type { FrameRow } from "../outcome/result.ts";

/** Heading (with its unit) and key of every column. */
const COLUMNS: readonly (readonly [heading: string, key: keyof FrameRow])[] = [
  ["index", "index"],
  ["delay_ns", "delay_ns"],
  ["photons", "photons"],
  ["u_photons", "u_photons"],
  ["x_um", "x_um"],
  ["y_um", "y_um"],
  ["variance_um2", "variance_um2"],
  ["u_variance_um2", "u_variance_um2"],
  ["variance_xx_um2", "variance_xx_um2"],
  ["variance_xy_um2", "variance_xy_um2"],
  ["variance_yy_um2", "variance_yy_um2"],
  ["msd_um2", "msd_um2"],
  ["u_msd_um2", "u_msd_um2"],
  ["background_photons_per_pixel", "background"],
  ["reduced_chi2", "reduced_chi2"],
  ["hot_pixels", "hot_pixels"],
  ["used", "used"],
  ["used_in_decay", "used_in_decay"],
  ["flags", "flags"],
];

/**
 * frames.csv: one line a frame, units in the headings, an empty field where a frame has no such number, flags
 * joined by a space. Numbers keep every digit, so that nothing is lost on the way into another program.
 */
export function framesCsv(frames: readonly FrameRow[]): string {
  const lines = frames.map((row) => COLUMNS.map(([, key]) => field(row[key])).join(","));
  return `${[COLUMNS.map(([heading]) => heading).join(","), ...lines].join("\n")}\n`;
}

function field(value: FrameRow[keyof FrameRow]): string {
  if (value === null) return "";
  if (Array.isArray(value)) return value.join(" ");
  if (typeof value === "number" && !Number.isFinite(value)) {
    throw new RangeError(`a number for the table of frames is not finite: ${value}`);
  }
  return String(value);
}
