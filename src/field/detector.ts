import type { Random } from "../numerics/random.ts";
import type { Detector } from "../stack/acquisition.ts";

/** Counts as a 16-bit camera stores them. */
const FULL_16_BITS = 65535;

/**
 * One recorded frame from its mean light.
 *
 * Photons arrive as Poisson draws. Amplification turns n photons into Gamma(n/(F−1), F−1) photons' worth of charge:
 * mean n, variance n(F−1), so that mean light λ comes out with variance F·λ (the usual model of a multiplying
 * register; for F = 2 it is the exponential register of Basden, Haniff & Mackay, Mon. Not. R. Astron. Soc. 345, 985,
 * 2003). Then gain, offset, normal read noise, rounding, and the clip at 0 and at saturation.
 *
 * @param light mean photons per pixel, not negative
 * @returns whole counts, 0 to 65535
 */
export function record(light: Float64Array, detector: Detector, random: Random): Uint16Array {
  const { offset, gain, readNoise, excessNoise } = detector;
  const full = Math.min(detector.saturation ?? FULL_16_BITS, FULL_16_BITS);
  const spread = excessNoise - 1;
  const counts = new Uint16Array(light.length);
  for (let i = 0; i < light.length; i++) {
    const photons = random.poisson(light[i]!);
    const charge = spread > 0 && photons > 0 ? random.gamma(photons / spread, spread) : photons;
    const noise = readNoise > 0 ? readNoise * random.normal() : 0;
    counts[i] = Math.min(Math.max(Math.round(offset + gain * charge + noise), 0), full);
  }
  return counts;
}
