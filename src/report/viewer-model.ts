import type { ViewerData } from "./viewer-data.ts";

type Shown = Pick<ViewerData, "kind" | "region" | "pixel" | "excessNoise" | "darkVariance">;

/**
 * The fitted spot with its background, in photons, summed over the pixels of every shown cell. Its text is put into
 * the page, so it must hold everything it needs.
 * @param spot N, x, y, Σxx, Σxy, Σyy, B as in a spot, µm and photons
 */
export function modelCells(spot: readonly number[], shown: Shown): Float64Array {
  const { columns, rows, bin, binDown, left, top } = shown.region;
  const { pixel } = shown;
  const isTrace = shown.kind === "trace";
  const [n = 0, cx = 0, cy = 0, xx = 1, xy = 0, yy = 1, background = 0] = spot;
  const determinant = isTrace ? xx : xx * yy - xy * xy;
  const peak = isTrace
    ? (n * pixel) / Math.sqrt(2 * Math.PI * xx)
    : (n * pixel * pixel) / (2 * Math.PI * Math.sqrt(determinant));
  const cells = new Float64Array(columns * rows);
  for (let y = 0; y < rows * binDown; y++) {
    const dy = isTrace ? 0 : (top + y) * pixel - cy;
    for (let x = 0; x < columns * bin; x++) {
      const dx = (left + x) * pixel - cx;
      const form = isTrace ? (dx * dx) / xx : (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant;
      const cell = Math.floor(y / binDown) * columns + Math.floor(x / bin);
      cells[cell] = (cells[cell] ?? 0) + background + peak * Math.exp(-form / 2);
    }
  }
  return cells;
}

/** (recorded − model) in the standard deviations that the model gives a cell. Its text is put into the page, too. */
export function residualCells(light: Float64Array, model: Float64Array, shown: Shown): Float64Array {
  const dark = shown.region.bin * shown.region.binDown * shown.darkVariance;
  return light.map((value, k) => {
    const expected = model[k] ?? 0;
    return (value - expected) / Math.sqrt(Math.max(1e-6, shown.excessNoise * Math.max(0, expected) + dark));
  });
}

/** Cells of one frame from the levels of a whole-stack model, photons. Its text is put into the page, too. */
export function wholeModelCells(
  levels: Uint16Array,
  place: number,
  step: number,
  shown: Pick<ViewerData, "region" | "excessNoise" | "darkVariance">,
): Float64Array {
  const { columns, rows, bin, binDown } = shown.region;
  const size = columns * rows;
  const dark = bin * binDown * shown.darkVariance;
  return Float64Array.from({ length: size }, (_, k) => {
    return Math.max(0, (step * (levels[place * size + k] ?? 0)) ** 2 - dark) / shown.excessNoise;
  });
}
