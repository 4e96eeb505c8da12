import type { Covariance } from "../frame/spot.ts";
import type { Timing } from "./exposure.ts";

/**
 * How the light is recorded. A trace has one row whose height is the width of the slit (Infinity: no slit), with the
 * slit's middle at y = 0.
 */
export interface Recording extends Timing {
  readonly columns: number;
  readonly rows: number;
  /** Size of a pixel at the sample, µm. */
  readonly pixelX: number;
  readonly pixelY: number;
  /** Variance of the point-spread function per axis, µm². It blurs the light, not the density. */
  readonly psfVariance: number;
  /** Where the pulse strikes at delay 0, µm from the centre of pixel (0, 0). */
  readonly centre: readonly [x: number, y: number];
  /** How the picture moves over delay, µm/ns; taken at the middle of the gate. */
  readonly drift: readonly [x: number, y: number];
}

/** What a frame's light is in truth, before pixels and point-spread function. */
export interface FrameLight {
  /** Light in the whole plane, or behind the slit, in the unit of the start. */
  readonly amount: number;
  /** Covariance of that light, µm²; behind a slit only xx has meaning and the others are 0. */
  readonly covariance: Covariance;
  /** Part of the light that comes from caught excitons, 0 to 1. */
  readonly caughtShare: number;
}

/** Noise-free frames and what they are in truth. */
export interface MeanFrames {
  /** One a frame, row-major (y, x): light per pixel in the unit of the start. */
  readonly frames: readonly Float64Array[];
  readonly light: readonly FrameLight[];
}

export interface Accuracy {
  /** Relative error of the densities that the time step is chosen for. */
  readonly tolerance: number;
  /** Standard deviations kept free between spot and border. */
  readonly clearance: number;
  /** Grid points per standard deviation of the start. */
  readonly resolution: number;
}

export const DEFAULT_ACCURACY: Accuracy = { tolerance: 1e-6, clearance: 6, resolution: 3 };

export const EMPTY_LIGHT: FrameLight = { amount: 0, covariance: [0, 0, 0], caughtShare: 0 };

/** Whether the light comes through a slit that cuts the spot. */
export function hasSlit(recording: Recording): boolean {
  return recording.rows === 1 && Number.isFinite(recording.pixelY);
}

/** Where the spot's centre stands in a frame, µm. */
export function centreOf(recording: Recording, frame: number): [x: number, y: number] {
  const t = recording.delays[frame]! + recording.gate / 2;
  return [recording.centre[0] + recording.drift[0] * t, recording.centre[1] + recording.drift[1] * t];
}
