import type { Covariance } from "../frame/spot.ts";
import { spreadCovariance } from "./medium.ts";

/**
 * A periodic grid of nx × ny points with the spot's centre at index (0, 0): x = ix·hx for ix < nx/2, (ix − nx)·hx
 * above. Sizes are powers of two. Row-major (y, x).
 */
export interface Grid {
  readonly nx: number;
  readonly ny: number;
  /** Distance of the points, µm. */
  readonly hx: number;
  readonly hy: number;
}

export interface GridDemand {
  /** Standard deviations of the spot at its last age that must lie between its centre and the border. */
  readonly clearance: number;
  /** Grid points per standard deviation of the starting spot, along its narrow direction. */
  readonly resolution: number;
}

const LARGEST_SIDE = 4096;

/**
 * The smallest grid that holds a spot from its start to the age `last`.
 *
 * A Gaussian sampled with r points per standard deviation is aliased by exp(−(πr)²/2): 4e-14 at r = 2.5. A border at
 * clearance s carries exp(−s²/2) of the peak: 1.5e-8 at s = 6, so what wraps around is below every photon count.
 *
 * @throws RangeError where the spot grows so large against its start that no grid of 4096 points holds it
 */
export function gridFor(start: Covariance, diffusion: Covariance, last: number, demand: GridDemand): Grid {
  const end = spreadCovariance(start, diffusion, Math.max(last, 0));
  // the spectrum reaches as far as the spot is narrow in a cut at fixed other coordinate
  const narrowX = Math.sqrt(start[0] - (start[1] * start[1]) / start[2]);
  const narrowY = Math.sqrt(start[2] - (start[1] * start[1]) / start[0]);
  const [nx, hx] = axis(Math.sqrt(Math.max(end[0], start[0])), narrowX, demand);
  const [ny, hy] = axis(Math.sqrt(Math.max(end[2], start[2])), narrowY, demand);
  return { nx, ny, hx, hy };
}

function axis(wide: number, narrow: number, { clearance, resolution }: GridDemand): [n: number, h: number] {
  const side = 2 * clearance * wide;
  const n = 2 ** Math.ceil(Math.log2(Math.max((side * resolution) / narrow, 8)));
  if (!(n <= LARGEST_SIDE)) {
    throw new RangeError(
      `The spot grows from ${narrow.toPrecision(3)} to ${wide.toPrecision(3)} µm: too far for a grid of ${LARGEST_SIDE} points.`,
    );
  }
  return [n, side / n];
}

/** Coordinate of grid index i, µm. */
export function coordinate(i: number, n: number, h: number): number {
  return (i < n / 2 ? i : i - n) * h;
}

/** Angular frequency of spectral index k, 1/µm. */
export function frequency(k: number, n: number, h: number): number {
  return ((k < n / 2 ? k : k - n) * 2 * Math.PI) / (n * h);
}

/** The start on the grid's points. */
export function gaussianOnGrid(grid: Grid, amount: number, [xx, xy, yy]: Covariance): Float64Array {
  const { nx, ny, hx, hy } = grid;
  const det = xx * yy - xy * xy;
  const peak = amount / (2 * Math.PI * Math.sqrt(det));
  const field = new Float64Array(nx * ny);
  for (let iy = 0; iy < ny; iy++) {
    const y = coordinate(iy, ny, hy);
    for (let ix = 0; ix < nx; ix++) {
      const x = coordinate(ix, nx, hx);
      field[iy * nx + ix] = peak * Math.exp(-0.5 * ((yy * x * x - 2 * xy * x * y + xx * y * y) / det));
    }
  }
  return field;
}

/** Amount and second moments of a field on a grid: ∫f dA, and ∫r rᵀf dA / ∫f dA in µm². */
export function moments(grid: Grid, field: Float64Array): { amount: number; covariance: Covariance } {
  const { nx, ny, hx, hy } = grid;
  let sum = 0;
  let xx = 0;
  let xy = 0;
  let yy = 0;
  for (let iy = 0; iy < ny; iy++) {
    const y = coordinate(iy, ny, hy);
    for (let ix = 0; ix < nx; ix++) {
      const x = coordinate(ix, nx, hx);
      const f = field[iy * nx + ix]!;
      sum += f;
      xx += f * x * x;
      xy += f * x * y;
      yy += f * y * y;
    }
  }
  return {
    amount: sum * hx * hy,
    covariance: sum === 0 ? [0, 0, 0] : [xx / sum, xy / sum, yy / sum],
  };
}

/**
 * The same field on a grid twice as wide and half as fine along x, along y or both, of as many points: every second
 * point, with nothing around. Good for a field that has grown smooth enough and keeps clear of the old border.
 */
export function widened(
  grid: Grid,
  field: Float64Array,
  along: { readonly x: boolean; readonly y: boolean },
): { grid: Grid; field: Float64Array } {
  const { nx, ny } = grid;
  const [sx, sy] = [along.x ? 2 : 1, along.y ? 2 : 1];
  const wide = new Float64Array(field.length);
  for (let iy = -ny / 2 / sy; iy < ny / 2 / sy; iy++) {
    for (let ix = -nx / 2 / sx; ix < nx / 2 / sx; ix++) {
      const from = ((sy * iy + ny) % ny) * nx + ((sx * ix + nx) % nx);
      wide[((iy + ny) % ny) * nx + ((ix + nx) % nx)] = field[from]!;
    }
  }
  return { grid: { nx, ny, hx: sx * grid.hx, hy: sy * grid.hy }, field: wide };
}
