import { type Grid, gaussianOnGrid } from "./grid.ts";
import { decayedTime, type LinearFlow, linearFlow } from "./linear-flow.ts";
import {
  determinant,
  type Medium,
  peakDensity,
  removalRate,
  type Start,
  spreadCovariance,
} from "./medium.ts";
import { PushedStep } from "./pushed-step.ts";
import { Transform } from "./transform.ts";

/** Relative error = ERROR_SCALE·(rates·step)⁴, measured on spots with k n₀ τ from 0.3 to 30 and c τ up to 2. */
const ERROR_SCALE = 8e-3;
/** Longest step with repulsion in units of 1/(b n·q·Dq) of the finest mode: Runge–Kutta's 2.78, less a margin. */
const STABLE = 2.2;

/**
 * The densities n and m of a spot on a periodic grid, moved forward in time.
 *
 * Strang's symmetric splitting (SIAM J. Numer. Anal. 5, 506, 1968): half a step of annihilation, a whole step of
 * diffusion, decay and capture, exact in Fourier space, half a step of annihilation. Annihilation is taken in the frame
 * that decays with γ, where its closed form makes a uniform field exact. The error is of second order in the step;
 * one whole and two half steps, combined as (4·two − one)/3, take it to fourth order (Richardson's extrapolation).
 * Without annihilation a step of any length is exact and one suffices. With repulsion see PushedStep.
 */
export class Evolution {
  readonly grid: Grid;
  /** n on the grid, row-major (y, x). */
  readonly free: Float64Array;
  /** Spectrum of m; nothing in the equations needs m at a point. */
  readonly caught: Float64Array;
  readonly transform: Transform;
  readonly #medium: Medium;
  readonly #start: Start;
  readonly #tolerance: number;
  readonly #spectrum: Float64Array;
  readonly #coarseFree: Float64Array;
  readonly #coarseCaught: Float64Array;
  readonly #flows = new Map<number, LinearFlow>();
  readonly #pushed: PushedStep | null;
  #age = 0;
  #peak: number;

  /** @param tolerance relative error of the densities that the step is chosen for */
  constructor(medium: Medium, start: Start, grid: Grid, tolerance: number) {
    this.grid = grid;
    this.transform = new Transform(grid);
    this.free = gaussianOnGrid(grid, start.amount, start.covariance);
    this.caught = this.transform.spectrum();
    this.#medium = medium;
    this.#start = start;
    this.#tolerance = tolerance;
    this.#spectrum = this.transform.spectrum();
    this.#coarseFree = new Float64Array(this.free.length);
    this.#coarseCaught = this.transform.spectrum();
    this.#peak = peakDensity(start);
    this.#pushed = medium.repulsion === 0 ? null : new PushedStep(medium, grid, this.transform);
  }

  /** Time since the last pulse, ns. */
  get age(): number {
    return this.#age;
  }

  /** Largest density of free excitons. */
  get peak(): number {
    return this.#peak;
  }

  /**
   * Moves on to the given time since the last pulse.
   * @param watch called after each step; steps are then short enough to be interpolated between (see DenseLight)
   */
  advance(to: number, watch?: () => void): void {
    while (this.#age < to) {
      const remaining = to - this.#age;
      const longest = watch === undefined ? this.#longestStep() : this.#longestWatchedStep();
      const count = Math.max(1, Math.ceil(remaining / longest - 1e-9));
      // a few equal steps share one table of factors before the bound is looked at again
      const batch = Math.min(count, 4);
      const h = remaining / count;
      for (let i = 1; i <= batch; i++) {
        this.#step(h);
        this.#age = i === count ? to : this.#age + h;
        watch?.();
      }
    }
  }

  /** The next pulse adds the start to what is still there. */
  pulse(): void {
    const fresh = gaussianOnGrid(this.grid, this.#start.amount, this.#start.covariance);
    for (let i = 0; i < fresh.length; i++) this.free[i] = this.free[i]! + fresh[i]!;
    this.#peak = largestOf(this.free);
    this.#age = 0;
  }

  /** Forgets the caught excitons. */
  emptyTraps(): void {
    this.caught.fill(0);
  }

  #step(h: number): void {
    if (this.#pushed !== null) {
      this.#pushed.take(h, this.#flowOver(h / 2), this.#flowOver(h), this.free, this.caught);
      this.#peak = largestOf(this.free);
      return;
    }
    if (this.#medium.annihilation === 0) {
      this.#split(h, this.free, this.caught);
      return;
    }
    const capturing = this.#medium.capture > 0;
    this.#coarseFree.set(this.free);
    if (capturing) this.#coarseCaught.set(this.caught);
    this.#split(h, this.#coarseFree, this.#coarseCaught);
    this.#split(h / 2, this.free, this.caught);
    this.#split(h / 2, this.free, this.caught);
    extrapolate(this.free, this.#coarseFree);
    if (capturing) extrapolate(this.caught, this.#coarseCaught);
    this.#peak = largestOf(this.free);
  }

  #split(h: number, free: Float64Array, caught: Float64Array): void {
    const gamma = removalRate(this.#medium);
    const loss = this.#medium.annihilation * decayedTime(gamma, h / 2);
    annihilate(free, loss);
    this.#flow(h, free, caught);
    annihilate(free, loss * Math.exp((gamma * h) / 2));
  }

  #flow(h: number, free: Float64Array, caught: Float64Array): void {
    const { survival, catching, trapSurvival } = this.#flowOver(h);
    const spectrum = this.#spectrum;
    this.transform.toSpectrum(free, spectrum);
    if (catching !== null) {
      for (let i = 0; i < catching.length; i++) {
        caught[2 * i] = caught[2 * i]! * trapSurvival + spectrum[2 * i]! * catching[i]!;
        caught[2 * i + 1] = caught[2 * i + 1]! * trapSurvival + spectrum[2 * i + 1]! * catching[i]!;
      }
    }
    for (let i = 0; i < survival.length; i++) {
      spectrum[2 * i] = spectrum[2 * i]! * survival[i]!;
      spectrum[2 * i + 1] = spectrum[2 * i + 1]! * survival[i]!;
    }
    this.transform.toField(spectrum, free);
  }

  #flowOver(h: number): LinearFlow {
    let flow = this.#flows.get(h);
    if (flow === undefined) {
      flow = linearFlow(this.#medium, this.grid, h);
      if (this.#flows.size > 8) this.#flows.clear();
      this.#flows.set(h, flow);
    }
    return flow;
  }

  #longestStep(): number {
    const { meeting, spreading, pushing } = this.#rates();
    const colliding = meeting + pushing;
    const other = spreading + this.#medium.capture;
    const fourth = colliding * other * (colliding + other) ** 2;
    const accurate = fourth === 0 ? Infinity : (this.#tolerance / (ERROR_SCALE * fourth)) ** 0.25;
    if (this.#pushed === null) return accurate;
    return Math.min(accurate, STABLE / (this.#medium.repulsion * this.#peak * this.#pushed.fastest));
  }

  #longestWatchedStep(): number {
    const { meeting, spreading, pushing } = this.#rates();
    const changing = meeting + spreading + pushing + this.#medium.capture;
    const interpolated = (30 * this.#tolerance) ** 0.25 / changing;
    return Math.min(this.#longestStep(), interpolated);
  }

  /**
   * Relative changes of the density at the centre by annihilation, k n, by diffusion, tr(DΣ⁻¹), and by repulsion,
   * b n·tr(DΣ⁻¹).
   */
  #rates(): { meeting: number; spreading: number; pushing: number } {
    const { diffusion, annihilation, repulsion } = this.#medium;
    const [dxx, dxy, dyy] = diffusion;
    const sigma = spreadCovariance(this.#start.covariance, diffusion, this.#age);
    const spreading = Math.abs(dxx * sigma[2] - 2 * dxy * sigma[1] + dyy * sigma[0]) / determinant(sigma);
    return { meeting: annihilation * this.#peak, spreading, pushing: repulsion * this.#peak * spreading };
  }
}

function annihilate(free: Float64Array, loss: number): void {
  if (loss === 0) return;
  for (let i = 0; i < free.length; i++) free[i] = free[i]! / (1 + free[i]! * loss);
}

/** fine ← (4·fine − coarse)/3 */
function extrapolate(fine: Float64Array, coarse: Float64Array): void {
  for (let i = 0; i < fine.length; i++) fine[i] = (4 * fine[i]! - coarse[i]!) / 3;
}

function largestOf(values: Float64Array): number {
  let largest = 0;
  for (let i = 0; i < values.length; i++) if (values[i]! > largest) largest = values[i]!;
  return largest;
}
