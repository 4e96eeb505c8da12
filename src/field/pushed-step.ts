import type { Grid } from "./grid.ts";
import { type LinearFlow, modeRates } from "./linear-flow.ts";
import { type Medium, removalRate } from "./medium.ts";
import type { Transform } from "./transform.ts";

/**
 * One step of all densities where excitons push each other apart.
 *
 * ∇·D(1 + bn)∇n = ∇·D∇n + ½b ∇·D∇n², so in Fourier space repulsion and annihilation are one factor on the square of
 * the density, −(k + ½b q·Dq)·FT[n²], and all else is exact (see LinearFlow). Fourth-order Runge–Kutta in the frame that
 * moves with the exact part (integrating factor; Lawson, SIAM J. Numer. Anal. 4, 372, 1967): no mode is ever stiff by
 * plain diffusion, and the number of excitons changes by decay, capture and annihilation alone.
 */
export class PushedStep {
  readonly #transform: Transform;
  /** −(k + ½b q·Dq) */
  readonly #factor: Float64Array;
  readonly #square: Float64Array;
  readonly #field: Float64Array;
  readonly #start: Float64Array;
  readonly #work: Float64Array;
  readonly #slopes: readonly [Float64Array, Float64Array, Float64Array, Float64Array];
  /** Largest q·Dq on the grid, 1/ns. */
  readonly fastest: number;

  constructor(medium: Medium, grid: Grid, transform: Transform) {
    const gamma = removalRate(medium);
    const spreading = modeRates(medium, grid).map((rate) => rate - gamma);
    this.fastest = spreading.reduce((most, rate) => Math.max(most, rate), 0);
    this.#factor = spreading.map((rate) => -(medium.annihilation + 0.5 * medium.repulsion * rate));
    this.#transform = transform;
    this.#square = new Float64Array(grid.nx * grid.ny);
    this.#field = new Float64Array(grid.nx * grid.ny);
    this.#start = transform.spectrum();
    this.#work = transform.spectrum();
    this.#slopes = [transform.spectrum(), transform.spectrum(), transform.spectrum(), transform.spectrum()];
  }

  /** Moves n (on the grid) and m (its spectrum) on by h, given the exact part over h/2 and over h. */
  take(h: number, half: LinearFlow, whole: LinearFlow, free: Float64Array, caught: Float64Array): void {
    const u = this.#start;
    const [a, b, c, d] = this.#slopes;
    this.#transform.toSpectrum(free, u);
    this.#slope(free, a);
    this.#stage((i) => half.survival[i >> 1]! * (u[i]! + 0.5 * h * a[i]!), b);
    this.#stage((i) => half.survival[i >> 1]! * u[i]! + 0.5 * h * b[i]!, c);
    this.#stage((i) => whole.survival[i >> 1]! * u[i]! + h * half.survival[i >> 1]! * c[i]!, d);
    if (whole.catching !== null && half.catching !== null) {
      for (let i = 0; i < u.length; i++) {
        const early = u[i]! + (h / 6) * a[i]!;
        caught[i] =
          caught[i]! * whole.trapSurvival +
          whole.catching[i >> 1]! * early +
          half.catching[i >> 1]! * (h / 3) * (b[i]! + c[i]!);
      }
    }
    for (let i = 0; i < u.length; i++) {
      const early = whole.survival[i >> 1]! * (u[i]! + (h / 6) * a[i]!);
      this.#work[i] = early + (h / 6) * (2 * half.survival[i >> 1]! * (b[i]! + c[i]!) + d[i]!);
    }
    this.#transform.toField(this.#work, free);
  }

  /** The slope at a stage whose spectrum is given element by element. */
  #stage(spectrum: (i: number) => number, out: Float64Array): void {
    for (let i = 0; i < this.#work.length; i++) this.#work[i] = spectrum(i);
    this.#transform.toField(this.#work, this.#field);
    this.#slope(this.#field, out);
  }

  #slope(field: Float64Array, out: Float64Array): void {
    for (let i = 0; i < field.length; i++) this.#square[i] = field[i]! * field[i]!;
    this.#transform.toSpectrum(this.#square, out);
    for (let i = 0; i < out.length; i++) out[i] = out[i]! * this.#factor[i >> 1]!;
  }
}
