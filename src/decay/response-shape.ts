import { gaussianShare, sigmaOfFwhm } from "./gaussian-exponential.ts";

/** A response of unit area, zero outside [from, to]. */
export interface ResponseShape {
  readonly from: number;
  readonly to: number;
  /** Where the panels should end, relative to the response's zero. */
  readonly breaks: readonly number[];
  density(t: number): number;
  /** ∫_a^b of the density. */
  share(a: number, b: number): number;
}

/** A Gaussian response of the given full width at half maximum, centred on the pulse. */
export function gaussianShape(fwhm: number): ResponseShape {
  const s = sigmaOfFwhm(fwhm);
  return {
    from: -7 * s,
    to: 7 * s,
    breaks: [-7, -4.5, -3, -1.5, 0, 1.5, 3, 4.5, 7].map((x) => x * s),
    density: (t) => Math.exp((-t * t) / (2 * s * s)) / (s * Math.sqrt(2 * Math.PI)),
    share: (a, b) => gaussianShare(a, b, s),
  };
}
