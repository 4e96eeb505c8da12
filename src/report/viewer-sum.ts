import type { ViewerData } from "./viewer-data.ts";

/** A frame's recorded and modelled cells, photons. */
export interface Compared {
  readonly light: Float64Array;
  readonly model: Float64Array;
  /** Pixels that the fits left out as hot, dead or struck. */
  readonly struck: number;
}

/** Residuals added up, in standard deviations. */
export interface ResidualSum {
  readonly columns: number;
  readonly rows: number;
  readonly cells: Float64Array;
  /** Root of the mean square over cells with light enough; null without such a cell. */
  readonly rms: number | null;
}

/**
 * What a model leaves over in several frames together: Σ(recorded − model) / √Σ variance over the frames and over
 * squares of `group` × `group` cells (on a trace, `group` cells along the line). Where the model is right each sum is a
 * draw of mean 0 and standard deviation 1, so that what is common to the frames stands out and chance does not. Of a
 * frame with struck pixels as many cells, those that lie farthest off, are left out here, too. Its text is put into the
 * page, so it must hold everything it needs.
 */
export function residualSum(
  frames: readonly Compared[],
  shown: Pick<ViewerData, "region" | "excessNoise" | "darkVariance">,
  group: number,
): ResidualSum {
  const { region, excessNoise } = shown;
  const dark = region.bin * region.binDown * shown.darkVariance;
  const columns = Math.ceil(region.columns / group);
  const rows = Math.ceil(region.rows / group);
  const sums = new Float64Array(columns * rows);
  const variances = new Float64Array(columns * rows);
  const variance = (expected: number) => excessNoise * Math.max(0, expected) + dark;
  for (const { light, model, struck } of frames) {
    const out = farthestOff(light, model, struck);
    for (let k = 0; k < light.length; k++) {
      if (out.has(k)) continue;
      const row = Math.floor(Math.floor(k / region.columns) / group);
      const at = row * columns + Math.floor((k % region.columns) / group);
      const expected = model[k] ?? 0;
      sums[at] = (sums[at] ?? 0) + (light[k] ?? 0) - expected;
      variances[at] = (variances[at] ?? 0) + variance(expected);
    }
  }
  const cells = sums.map((sum, at) => sum / Math.sqrt(Math.max(1e-6, variances[at] ?? 0)));
  // below a handful of photons a sum is not yet normal (common practice, no source)
  const bright = cells.filter((_, at) => (variances[at] ?? 0) >= 5);
  const square = bright.reduce((sum, value) => sum + value * value, 0);
  return { columns, rows, cells, rms: bright.length === 0 ? null : Math.sqrt(square / bright.length) };

  /** At most `count` cells that stand out as the fits ask of a struck pixel: by 5.5 deviations and 5 photons. */
  function farthestOff(light: Float64Array, model: Float64Array, count: number): Set<number> {
    if (count === 0) return new Set();
    const excess = Array.from(light, (value, k) => {
      const expected = model[k] ?? 0;
      return Math.abs(value - expected) - 5.5 * Math.sqrt(variance(expected)) - 5 * excessNoise;
    });
    const far = [...excess.keys()].filter((k) => (excess[k] ?? 0) > 0);
    return new Set(far.sort((a, b) => (excess[b] ?? 0) - (excess[a] ?? 0)).slice(0, count));
  }
}

/** Consecutive groups of nearly equal size, at most `count` of them. Its text is put into the page, too. */
export function inGroups(places: readonly number[], count: number): number[][] {
  const groups = Math.min(count, places.length);
  return Array.from({ length: groups }, (_, i) =>
    places.slice(Math.round((i * places.length) / groups), Math.round(((i + 1) * places.length) / groups)),
  );
}
