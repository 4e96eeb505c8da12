/** The detector's noise in detected photons: variance = excess·(mean photons) + floor, taken from the model. */
export interface NoiseLaw {
  /** Variance factor of the amplification; 1 for photon counting. */
  readonly excess: number;
  /** Read noise squared, photons²; 0 for photon counting. */
  readonly floor: number;
}

/** Where a patch lies in the picture, in pixels. */
export interface Rectangle {
  readonly x0: number;
  readonly y0: number;
  readonly width: number;
  readonly height: number;
}

/**
 * The part of a frame in which the spot is fitted, in detected photons, with the rest of the frame pooled.
 *
 * Beyond some five standard deviations of the spot pixels carry only the background: their number and their sum say
 * all that they know of it, so pooling them loses no information.
 */
export interface Patch {
  readonly rectangle: Rectangle;
  /** Photons, row-major, rectangle.height × rectangle.width; single precision keeps a long stack small in memory. */
  readonly data: Float32Array;
  /** Pixels outside the rectangle that are in the pool, and their photons. */
  outerCount: number;
  outerSum: number;
  /** Indices into `data` of pixels set aside as hot, dead or struck. */
  excluded: number[];
}

/** The smallest variance that a photon-counting pixel is given, photons²: it keeps 1/variance finite where the model vanishes. */
const SMALLEST_VARIANCE = 1e-9;

/** Variance of a pixel whose mean is `mean` photons, photons². */
export function pixelVariance(noise: NoiseLaw, mean: number): number {
  const variance = noise.floor + (mean > 0 ? noise.excess * mean : 0);
  return Math.max(variance, SMALLEST_VARIANCE);
}
