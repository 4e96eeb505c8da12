import { LAYOUT, toSpot } from "../frame/pixel-spot.ts";
import type { Spot } from "../frame/spot.ts";
import type { Reading } from "./reading.ts";
import type { FrameRow } from "./result.ts";

/** One row a frame: read against the law where the frame is in the window, its own fit elsewhere. */
export function frameRows(reading: Reading): FrameRow[] {
  const { stack, flags } = reading;
  const inWindow = new Set(reading.widths.map((width) => width.frame));
  const inDecay = new Set(reading.decays === null ? [] : reading.light.frames);
  const spots = spotsOf(reading);
  const intercept = interceptOf(reading);
  const axes = stack.kind === "map" ? 2 : 1;
  return stack.acquisition.time.delays.map((delay, index) => {
    const spot = spots[index] ?? null;
    const width = spot === null || flags[index]!.includes("before-pulse") ? null : widthOf(spot);
    const lightU = reading.light.sigma[index] ?? Number.NaN;
    const outliers = reading.frames.outerOutliers[index]! + reading.frames.patches[index]!.excluded.length;
    return {
      index,
      delay_ns: delay,
      photons: finite(reading.light.value[index] ?? spot?.photons),
      u_photons: finite(lightU),
      x_um: finite(spot?.centre[0]),
      y_um: stack.kind === "map" ? finite(spot?.centre[1]) : null,
      variance_um2: finite(width?.value),
      u_variance_um2: finite(width?.u),
      variance_xx_um2: width === null ? null : finite(spot?.covariance[0]),
      variance_xy_um2: width === null || stack.kind === "trace" ? null : finite(spot?.covariance[1]),
      variance_yy_um2: width === null || stack.kind === "trace" ? null : finite(spot?.covariance[2]),
      msd_um2: width === null ? null : finite(axes * (width.value - intercept)),
      u_msd_um2: width === null ? null : finite(axes * width.u),
      background: finite(spot?.background),
      reduced_chi2: finite(spot?.reducedChi2),
      hot_pixels: outliers,
      used: inWindow.has(index),
      used_in_decay: inDecay.has(index),
      flags: [...flags[index]!],
    };
  });
}

/** Each frame's spot as reported: scored in the window, its own fit elsewhere. */
export function spotsOf(reading: Reading): (Spot | null)[] {
  const { frames, scored, own, flags } = reading;
  const { kind, pixel } = frames;
  const inWindow = new Set(reading.widths.map((width) => width.frame));
  return scored.map((read, index) => {
    const outliers = frames.outerOutliers[index]! + frames.patches[index]!.excluded.length;
    if (read !== null && inWindow.has(index)) {
      const reducedChi2 = read.pearson / Math.max(read.pixels - LAYOUT[kind].count, 1);
      return toSpot(kind, read.estimate, read.covariance, pixel, { reducedChi2, outliers });
    }
    const fit = own[index] ?? null;
    if (fit === null || flags[index]!.includes("empty")) return null;
    return toSpot(kind, fit.parameters, fit.covariance, pixel, { reducedChi2: fit.reducedChi2, outliers });
  });
}

function widthOf(spot: Spot): { value: number; u: number } {
  const { covariance, uncertainty } = spot;
  if (uncertainty.length === 16) return { value: covariance[0], u: Math.sqrt(uncertainty[2 * 4 + 2]!) };
  const c = (i: number, j: number): number => uncertainty[i * 7 + j]!;
  return { value: (covariance[0] + covariance[2]) / 2, u: Math.sqrt((c(3, 3) + c(5, 5) + 2 * c(3, 5)) / 4) };
}

/** Variance per axis of the preferred law at delay 0, µm². */
export function interceptOf({ preferredLaw, laws, line }: Reading): number {
  const law = preferredLaw === "line" ? null : laws[preferredLaw];
  if (law !== null) return law.value(0);
  return line.intercept.length === 3 ? (line.intercept[0]! + line.intercept[2]!) / 2 : line.intercept[0]!;
}

function finite(value: number | undefined): number | null {
  return value !== undefined && Number.isFinite(value) ? value : null;
}
