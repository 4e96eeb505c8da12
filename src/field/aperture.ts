import { coordinate, frequency, type Grid } from "./grid.ts";
import { hasSlit, type Recording } from "./recording.ts";

/** Modes weaker than this share of the total are left out of the sums. */
const NEGLIGIBLE = 1e-13;

/**
 * Light that falls into each pixel, from the spectrum of the light's density on a grid.
 *
 * The spectrum gives the density everywhere, f(x, y) = Σ F(q) exp(i q·r)/(nx·ny), so a pixel's integral is exact: a
 * factor a·sinc(q a/2) per axis. The point-spread function is another factor, exp(−q²σ²/2). Centre, pixel and slit
 * need not fit the grid.
 *
 * @param spectrum as Transform makes it, the spot's centre at the grid's origin
 * @returns rows × columns, light per pixel; 0 for pixels outside the grid, where there is none to speak of
 */
export function lightPerPixel(
  grid: Grid,
  spectrum: Float64Array,
  recording: Recording,
  centre: readonly [x: number, y: number],
): Float64Array {
  const { columns, rows, pixelX, pixelY, psfVariance } = recording;
  const { nx, ny, hx, hy } = grid;
  const [lastX, lastY] = lastModes(grid, spectrum);
  const alongX = phases(
    columns,
    pixelX,
    centre[0],
    lastX + 1,
    (k) => frequency(k, nx, hx),
    psfVariance,
    nx * hx,
  );
  // negative frequencies along y come first
  const alongY = phases(
    rows,
    pixelY,
    centre[1],
    2 * lastY + 1,
    (j) => ((j - lastY) * 2 * Math.PI) / (ny * hy),
    psfVariance,
    ny * hy,
  );
  const frame = new Float64Array(columns * rows);
  const sums = new Float64Array(2 * (lastX + 1));
  for (let iy = 0; iy < rows; iy++) {
    sumAlongY(sums, spectrum, ny, lastY, alongY, iy);
    for (let ix = 0; ix < columns; ix++) {
      let light = 0;
      for (let k = 0; k <= lastX; k++) {
        const at = 2 * (ix * (lastX + 1) + k);
        const both = k === 0 || 2 * k === nx ? 1 : 2;
        light += both * (sums[2 * k]! * alongX[at]! - sums[2 * k + 1]! * alongX[at + 1]!);
      }
      frame[iy * columns + ix] = Math.max(light / (nx * ny), 0);
    }
  }
  return frame;
}

function sumAlongY(
  sums: Float64Array,
  spectrum: Float64Array,
  ny: number,
  lastY: number,
  alongY: Float64Array,
  iy: number,
): void {
  const count = 2 * lastY + 1;
  for (let k = 0; 2 * k < sums.length; k++) {
    let re = 0;
    let im = 0;
    for (let j = 0; j < count; j++) {
      const at = 2 * (k * ny + ((j - lastY + ny) % ny));
      const p = 2 * (iy * count + j);
      re += spectrum[at]! * alongY[p]! - spectrum[at + 1]! * alongY[p + 1]!;
      im += spectrum[at]! * alongY[p + 1]! + spectrum[at + 1]! * alongY[p]!;
    }
    sums[2 * k] = re;
    sums[2 * k + 1] = im;
  }
}

/** a·sinc(q a/2)·exp(−q²σ²/2)·exp(i q (x − c)) for each pixel and mode, interleaved. */
function phases(
  pixels: number,
  size: number,
  centre: number,
  modes: number,
  q: (mode: number) => number,
  psfVariance: number,
  side: number,
): Float64Array {
  const table = new Float64Array(2 * pixels * modes);
  for (let i = 0; i < pixels; i++) {
    const middle = Number.isFinite(size) ? i * size - centre : 0;
    // a pixel reaching over the border collects what lies inside it
    const from = Math.max(middle - size / 2, -side / 2);
    const to = Math.min(middle + size / 2, side / 2);
    if (to <= from) continue;
    for (let k = 0; k < modes; k++) {
      const frequencyHere = q(k);
      const half = (frequencyHere * (to - from)) / 2;
      const weight =
        (to - from) *
        (half === 0 ? 1 : Math.sin(half) / half) *
        Math.exp(-0.5 * psfVariance * frequencyHere ** 2);
      const angle = (frequencyHere * (from + to)) / 2;
      table[2 * (i * modes + k)] = weight * Math.cos(angle);
      table[2 * (i * modes + k) + 1] = weight * Math.sin(angle);
    }
  }
  return table;
}

/** Highest mode along each axis that still matters. */
function lastModes({ nx, ny }: Grid, spectrum: Float64Array): [x: number, y: number] {
  const least = NEGLIGIBLE * Math.abs(spectrum[0]!);
  let lastX = 0;
  let lastY = 0;
  for (let kx = 0; kx <= nx / 2; kx++) {
    for (let ky = 0; ky < ny; ky++) {
      const at = 2 * (kx * ny + ky);
      if (Math.abs(spectrum[at]!) + Math.abs(spectrum[at + 1]!) <= least) continue;
      lastX = kx;
      lastY = Math.max(lastY, Math.min(ky, ny - ky));
    }
  }
  return [lastX, Math.min(lastY, ny / 2 - 1)];
}

/**
 * All the light behind a recording's slit and its variance along x, µm², as it is before the point-spread function
 * widens it along x (across the slit the blur decides what comes through).
 */
export function lightBehindSlit(
  grid: Grid,
  spectrum: Float64Array,
  recording: Recording,
): { amount: number; varianceX: number } {
  if (!hasSlit(recording)) throw new RangeError("the recording has no slit");
  const { nx, hx } = grid;
  const line = lightPerPixel(grid, spectrum, { ...recording, columns: nx, rows: 1, pixelX: hx }, [
    (nx / 2) * hx,
    recording.centre[1],
  ]);
  let amount = 0;
  let second = 0;
  for (let i = 0; i < nx; i++) {
    const x = coordinate((i + nx / 2) % nx, nx, hx);
    amount += line[i]!;
    second += line[i]! * x * x;
  }
  const varianceX = amount === 0 ? 0 : second / amount - (hx * hx) / 12 - recording.psfVariance;
  return { amount, varianceX };
}
