import type { Acquisition, Detector } from "./acquisition.ts";

/** What a detector is taken for where nothing is said: every count is one photon and nothing is added. */
export const PHOTON_COUNTING: Detector = {
  offset: 0,
  gain: 1,
  readNoise: 0,
  excessNoise: 1,
  saturation: null,
};

/** Parts of an acquisition that differ from the defaults; within space, time, detector and sample each key alone. */
export interface AcquisitionParts {
  readonly space?: Partial<Acquisition["space"]>;
  readonly time?: Partial<Acquisition["time"]>;
  readonly detector?: Partial<Detector>;
  readonly slit?: Acquisition["slit"];
  readonly period?: Acquisition["period"];
  readonly response?: Acquisition["response"];
  readonly sample?: Partial<Acquisition["sample"]>;
  readonly conditions?: Acquisition["conditions"];
  readonly settings?: Acquisition["settings"];
}

/**
 * A complete acquisition from the two things that have no default.
 *
 * @param pixelUm side of a pixel at the sample, µm, taken as exact unless `parts.space.pixel` says otherwise
 * @param delaysNs gate opening of each frame, ns
 * @param parts whatever else is known, in internal units
 */
export function acquisitionDefaults(
  pixelUm: number,
  delaysNs: readonly number[],
  parts: AcquisitionParts = {},
): Acquisition {
  return {
    space: { pixel: { value: pixelUm, u: 0 }, calibration: null, psfFwhm: null, ...parts.space },
    time: { delays: delaysNs, gate: 0, relativeU: 0, ...parts.time },
    detector: { ...PHOTON_COUNTING, ...parts.detector },
    slit: parts.slit ?? null,
    period: parts.period ?? null,
    response: parts.response ?? null,
    sample: {
      name: null,
      spot: null,
      temperature: null,
      emissionOrder: 1,
      density: null,
      blueShift: null,
      layerDistance: null,
      permittivity: null,
      mass: null,
      ...parts.sample,
    },
    conditions: parts.conditions ?? {},
    settings: parts.settings ?? {},
  };
}
