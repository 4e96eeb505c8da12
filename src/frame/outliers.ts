import type { NoiseLaw, Patch } from "./patch.ts";
import { pixelVariance } from "./patch.ts";

/** Standard deviations, and photons beside them, by which a pixel must stand out. */
const DEVIATIONS = 5.5;
const PHOTONS = 5;

/** How far from its mean a pixel may lie: 5.5 standard deviations and 5 photons (times the excess factor). */
export function tolerance(noise: NoiseLaw, mean: number): number {
  return DEVIATIONS * Math.sqrt(pixelVariance(noise, mean)) + PHOTONS * noise.excess;
}

/**
 * Whether a pixel is hot, dead or struck by a cosmic ray: it differs from *both* what the smooth surroundings expect
 * and the median of its eight neighbours by more than {@link tolerance}. The second condition spares a spot that the
 * model describes badly; the photons beside the deviations spare the long tail of the Poisson distribution at small
 * means (fewer than one false alarm in 10⁷ pixels at any mean).
 *
 * @param expected mean of the pixel by the model, photons
 */
export function isOutlier(
  photons: ArrayLike<number>,
  width: number,
  height: number,
  index: number,
  noise: NoiseLaw,
  expected: number,
): boolean {
  const value = photons[index]!;
  if (Math.abs(value - expected) <= tolerance(noise, expected)) return false;
  const around = medianAround(photons, width, height, index);
  return Math.abs(value - around) > tolerance(noise, Math.max(around, 0));
}

/**
 * All outliers of a picture, by {@link isOutlier}; indices into `photons`, rising.
 *
 * Only pixels that stand out of their neighbours along the row or the column, at half the tolerance, are looked at:
 * the others cannot stand out of all eight.
 */
export function findOutliers(
  photons: ArrayLike<number>,
  width: number,
  height: number,
  noise: NoiseLaw,
  expected: (index: number) => number,
): number[] {
  const found: number[] = [];
  // a quarter of (5.5 s.d. + 5 photons)² is at least 7.5 variances and 6 photons² at the smaller neighbourhood
  const floor = 7.5 * pixelVariance(noise, 0) + 6;
  const perPhoton = 7.5 * noise.excess;
  for (let y = 0; y < height; y++) {
    const up = y > 0 ? -width : height > 1 ? width : 0;
    const down = y < height - 1 ? width : height > 1 ? -width : 0;
    for (let x = 0; x < width; x++) {
      const i = y * width + x;
      const value = photons[i]!;
      const across = (photons[x > 0 ? i - 1 : i + 1]! + photons[x < width - 1 ? i + 1 : i - 1]!) / 2;
      const along = up === 0 ? across : (photons[i + up]! + photons[i + down]!) / 2;
      const gap2 = Math.max((value - across) ** 2, (value - along) ** 2);
      if (gap2 < floor + perPhoton * Math.max(Math.min(across, along, value), 0)) continue;
      if (isOutlier(photons, width, height, i, noise, expected(i))) found.push(i);
    }
  }
  return found;
}

/** How many times the neighbours' median a glaring pixel holds; the peak of a spot of 0.6 pixels holds 6.4 times. */
const GLARING = 10;

/**
 * Pixels of a sum of frames that are hot beyond any spot's likeness, whatever the model: they must not even colour the
 * first look at a frame. Milder ones are found frame by frame.
 *
 * @param background mean of a pixel without spot
 */
export function findGlaring(
  photons: ArrayLike<number>,
  width: number,
  height: number,
  noise: NoiseLaw,
  background: number,
): number[] {
  return findOutliers(photons, width, height, noise, () => background).filter((i) => {
    const around = Math.max(medianAround(photons, width, height, i) - background, 0);
    return photons[i]! - background > GLARING * around + tolerance(noise, background);
  });
}

const neighbours = new Float64Array(8);

/** Median of a pixel's eight neighbours, fewer at the border. */
export function medianAround(
  photons: ArrayLike<number>,
  width: number,
  height: number,
  index: number,
): number {
  const x = index % width;
  const y = (index - x) / width;
  let count = 0;
  for (let j = Math.max(0, y - 1); j <= Math.min(height - 1, y + 1); j++) {
    for (let i = Math.max(0, x - 1); i <= Math.min(width - 1, x + 1); i++) {
      if (i === x && j === y) continue;
      // sorted as they come: eight numbers are too few to sort any other way
      const value = photons[j * width + i]!;
      let at = count++;
      for (; at > 0 && neighbours[at - 1]! > value; at--) neighbours[at] = neighbours[at - 1]!;
      neighbours[at] = value;
    }
  }
  const middle = count >> 1;
  return count % 2 === 1 ? neighbours[middle]! : (neighbours[middle - 1]! + neighbours[middle]!) / 2;
}

/** Takes outliers of a patch out of the fit. */
export function excludeFrom(patch: Patch, indices: readonly number[]): void {
  patch.excluded = [...new Set([...patch.excluded, ...indices])].sort((a, b) => a - b);
}
