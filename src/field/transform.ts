import FFT from "fft.js";
import type { Grid } from "./grid.ts";

/**
 * Fourier transform of a real field on a grid, by fft.js along rows and columns.
 *
 * A spectrum holds ny × (nx/2 + 1) complex numbers (the other half follows from the field being real), interleaved,
 * stored column by column of kx: element (kx, ky) is at 2·(kx·ny + ky). F(k) = Σ f(r)·exp(−i q·r), not normalised;
 * `toField` divides by nx·ny.
 */
export class Transform {
  readonly columns: number;
  readonly length: number;
  readonly #grid: Grid;
  readonly #rowFft: FFT;
  readonly #columnFft: FFT;
  readonly #rowIn: Float64Array;
  readonly #rowOut: Float64Array;
  readonly #columnIn: Float64Array;
  readonly #columnOut: Float64Array;

  constructor(grid: Grid) {
    this.#grid = grid;
    this.columns = grid.nx / 2 + 1;
    this.length = 2 * this.columns * grid.ny;
    this.#rowFft = new FFT(grid.nx);
    this.#columnFft = new FFT(grid.ny);
    this.#rowIn = new Float64Array(2 * grid.nx);
    this.#rowOut = new Float64Array(2 * grid.nx);
    this.#columnIn = new Float64Array(2 * grid.ny);
    this.#columnOut = new Float64Array(2 * grid.ny);
  }

  spectrum(): Float64Array {
    return new Float64Array(this.length);
  }

  /** Field (ny × nx, real) to spectrum. */
  toSpectrum(field: Float64Array, into: Float64Array): void {
    const { nx, ny } = this.#grid;
    const input = this.#rowIn;
    const out = this.#rowOut;
    // two real rows travel as one complex row and are told apart by symmetry
    for (let iy = 0; iy < ny; iy += 2) {
      const a = iy * nx;
      const b = a + nx;
      for (let ix = 0; ix < nx; ix++) {
        input[2 * ix] = field[a + ix]!;
        input[2 * ix + 1] = field[b + ix]!;
      }
      this.#rowFft.transform(out, input);
      for (let k = 0; k < this.columns; k++) {
        const minus = k === 0 ? 0 : nx - k;
        const re = out[2 * k]!;
        const im = out[2 * k + 1]!;
        const reMinus = out[2 * minus]!;
        const imMinus = out[2 * minus + 1]!;
        const at = 2 * (k * ny + iy);
        into[at] = 0.5 * (re + reMinus);
        into[at + 1] = 0.5 * (im - imMinus);
        into[at + 2] = 0.5 * (im + imMinus);
        into[at + 3] = 0.5 * (reMinus - re);
      }
    }
    for (let k = 0; k < this.columns; k++) {
      this.#columnIn.set(into.subarray(2 * k * ny, 2 * (k + 1) * ny));
      this.#columnFft.transform(this.#columnOut, this.#columnIn);
      into.set(this.#columnOut, 2 * k * ny);
    }
  }

  /** Spectrum to field; the spectrum is used as work space and destroyed. */
  toField(spectrum: Float64Array, into: Float64Array): void {
    const { nx, ny } = this.#grid;
    for (let k = 0; k < this.columns; k++) {
      this.#columnIn.set(spectrum.subarray(2 * k * ny, 2 * (k + 1) * ny));
      this.#columnFft.inverseTransform(this.#columnOut, this.#columnIn);
      spectrum.set(this.#columnOut, 2 * k * ny);
    }
    const input = this.#rowIn;
    const out = this.#rowOut;
    for (let iy = 0; iy < ny; iy += 2) {
      for (let k = 0; k < this.columns; k++) {
        const at = 2 * (k * ny + iy);
        const aRe = spectrum[at]!;
        const aIm = spectrum[at + 1]!;
        const bRe = spectrum[at + 2]!;
        const bIm = spectrum[at + 3]!;
        input[2 * k] = aRe - bIm;
        input[2 * k + 1] = aIm + bRe;
        if (k > 0 && k < nx / 2) {
          input[2 * (nx - k)] = aRe + bIm;
          input[2 * (nx - k) + 1] = bRe - aIm;
        }
      }
      this.#rowFft.inverseTransform(out, input);
      const a = iy * nx;
      const b = a + nx;
      for (let ix = 0; ix < nx; ix++) {
        into[a + ix] = out[2 * ix]!;
        into[b + ix] = out[2 * ix + 1]!;
      }
    }
  }
}
