/** A value with its standard uncertainty, both in the internal unit of its key. */
export interface Measured {
  readonly value: number;
  /** Standard uncertainty (k = 1), 0 where none was stated. */
  readonly u: number;
}

/** Where a setting came from. */
export type Origin = "acquisition file" | "command line" | "image metadata" | "default";

/** One setting as used: the text to show and where it came from. Keys are dotted names such as "space.pixel". */
export interface Setting {
  readonly text: string;
  readonly from: Origin;
}

/** What the instrument answers to an instantaneous flash, on the delay axis. */
export type Response =
  | { readonly kind: "gaussian" /** ns */; readonly fwhm: number }
  | {
      readonly kind: "sampled" /** ns, rising */;
      readonly delays: readonly number[];
      readonly counts: readonly number[];
    };

/** A condition to compare by: number with unit, or plain text. */
export interface Condition {
  readonly text: string;
  readonly value: number | null;
  readonly u: number;
  readonly unit: string | null;
}

/**
 * Everything that was told about a recording, after defaults, in internal units: µm, ns, detector counts, K, meV, nm.
 * Written from NAME.toml, command-line options and image metadata (design, section 3).
 */
export interface Acquisition {
  readonly space: {
    /** Side of a pixel at the sample, µm. */
    readonly pixel: Measured;
    /** Recordings with the same label share the error of the pixel size. */
    readonly calibration: string | null;
    /** µm */
    readonly psfFwhm: Measured | null;
  };
  readonly time: {
    /** Gate opening of every frame, ns, strictly rising, the pulse at 0. */
    readonly delays: readonly number[];
    /** How long each frame collects, ns; 0 where not stated. */
    readonly gate: number;
    /** Relative standard uncertainty of the time base. */
    readonly relativeU: number;
  };
  readonly detector: Detector;
  /** Width of the strip of sample that a trace integrates over, µm. */
  readonly slit: { readonly width: Measured } | null;
  /** Time between pulses, ns. */
  readonly period: number | null;
  readonly response: Response | null;
  readonly sample: {
    readonly name: string | null;
    readonly spot: string | null;
    /** K */
    readonly temperature: Measured | null;
    /** Light ∝ density^order: 1 excitons, 2 free electrons and holes. */
    readonly emissionOrder: 1 | 2;
    /** µm⁻², at the centre of the first frame's spot. */
    readonly density: Measured | null;
    /** meV */
    readonly blueShift: Measured | null;
    /** nm */
    readonly layerDistance: Measured | null;
    readonly permittivity: Measured | null;
    /** Exciton mass in electron masses. */
    readonly mass: Measured | null;
  };
  readonly conditions: Readonly<Record<string, Condition>>;
  /** Every setting by its dotted name, with where it came from. */
  readonly settings: Readonly<Record<string, Setting>>;
}

/**
 * The camera: counts = offset + gain·(detected photons) + noise, with variance (in counts)
 * excess·gain·(signal counts) + readNoise².
 */
export interface Detector {
  /** Counts in the dark. */
  readonly offset: number;
  /** Counts per detected photon. */
  readonly gain: number;
  /** Standard deviation, counts. */
  readonly readNoise: number;
  /** Variance factor of the amplification, ≥ 1. */
  readonly excessNoise: number;
  /** Counts at which a pixel is full, where known. */
  readonly saturation: number | null;
}
