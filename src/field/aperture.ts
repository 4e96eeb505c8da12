import { coordinate, type Grid } from "./grid.ts";
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
  const stepX = (2 * Math.PI) / (nx * hx);
  const stepY = (2 * Math.PI) / (ny * hy);
  const alongX = phases(columns, pixelX, centre[0], lastX + 1, stepX, psfVariance);
  const alongY = phases(rows, pixelY, centre[1], lastY + 1, stepY, psfVariance);
  const pairs = pairsAlongY(spectrum, ny, lastX, lastY);
  const frame = new Float64Array(columns * rows);
  const sums = new Float64Array(2 * (lastX + 1));
  for (let iy = 0; iy < rows; iy++) {
    sumAlongY(sums, pairs, alongY, lastY, iy);
    for (let ix = 0; ix < columns; ix++) {
      let light = 0;
      let at = 2 * ix * (lastX + 1);
      for (let k = 0; k < sums.length; k += 2) {
        light += sums[k]! * alongX[at]! - sums[k + 1]! * alongX[at + 1]!;
        at += 2;
      }
      frame[iy * columns + ix] = Math.max(light / (nx * ny), 0);
    }
  }
  return frame;
}

/**
 * F(kx, ky) and F(kx, −ky) belong to conjugate phases, so four real numbers a pair do: their sum, and i times their
 * difference. Columns kx > 0 count twice, for −kx.
 */
function pairsAlongY(spectrum: Float64Array, ny: number, lastX: number, lastY: number): Float64Array {
  const pairs = new Float64Array(4 * (lastX + 1) * (lastY + 1));
  for (let kx = 0; kx <= lastX; kx++) {
    const both = kx === 0 ? 1 : 2;
    for (let ky = 0; ky <= lastY; ky++) {
      const plus = 2 * (kx * ny + ky);
      const minus = 2 * (kx * ny + ny - ky);
      const reMinus = ky === 0 ? 0 : spectrum[minus]!;
      const imMinus = ky === 0 ? 0 : spectrum[minus + 1]!;
      const at = 4 * (kx * (lastY + 1) + ky);
      pairs[at] = both * (spectrum[plus]! + reMinus);
      pairs[at + 1] = both * (spectrum[plus + 1]! + imMinus);
      pairs[at + 2] = -both * (spectrum[plus + 1]! - imMinus);
      pairs[at + 3] = both * (spectrum[plus]! - reMinus);
    }
  }
  return pairs;
}

function sumAlongY(
  sums: Float64Array,
  pairs: Float64Array,
  alongY: Float64Array,
  lastY: number,
  iy: number,
): void {
  const first = 2 * iy * (lastY + 1);
  let at = 0;
  for (let k = 0; k < sums.length; k += 2) {
    let re = 0;
    let im = 0;
    for (let p = first; p < first + 2 * (lastY + 1); p += 2) {
      const cos = alongY[p]!;
      const sin = alongY[p + 1]!;
      re += pairs[at]! * cos + pairs[at + 2]! * sin;
      im += pairs[at + 1]! * cos + pairs[at + 3]! * sin;
      at += 4;
    }
    sums[k] = re;
    sums[k + 1] = im;
  }
}

/** a·sinc(q a/2)·exp(−q²σ²/2)·exp(i q (x − c)) for each pixel and mode, interleaved. */
function phases(
  pixels: number,
  size: number,
  centre: number,
  modes: number,
  step: number,
  psfVariance: number,
): Float64Array {
  const side = (2 * Math.PI) / step;
  const table = new Float64Array(2 * pixels * modes);
  for (let i = 0; i < pixels; i++) {
    const middle = Number.isFinite(size) ? i * size - centre : 0;
    // a pixel reaching over the border collects what lies inside it
    const from = Math.max(middle - size / 2, -side / 2);
    const to = Math.min(middle + size / 2, side / 2);
    if (to <= from) continue;
    for (let k = 0; k < modes; k++) {
      const q = k * step;
      const half = (q * (to - from)) / 2;
      const weight =
        (to - from) * (half === 0 ? 1 : Math.sin(half) / half) * Math.exp(-0.5 * psfVariance * q ** 2);
      const angle = (q * (from + to)) / 2;
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
  // the highest frequency has no partner of the other sign; a resolved spot has nothing there
  return [Math.min(lastX, nx / 2 - 1), Math.min(lastY, ny / 2 - 1)];
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
