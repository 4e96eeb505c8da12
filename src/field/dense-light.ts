import type { Evolution } from "./evolution.ts";
import { modeRates } from "./linear-flow.ts";
import { type Medium, removalRate } from "./medium.ts";

/** Spectra of n and m and of what changes them besides uniform decay, at one moment. */
interface Snapshot {
  age: number;
  readonly free: Float64Array;
  /** FT of ∇·D(1 + b n)∇n − k n². */
  readonly freeGain: Float64Array;
  readonly caught: Float64Array;
}

/** A time whose light is wanted, with its weight. */
export interface Sample {
  readonly age: number;
  readonly weight: number;
}

/**
 * The light between two ends of a step, without stopping there: a cubic through values and slopes at both ends, of
 * e^(γt)·n and e^(t/τ_m)·m, which change slowest. Its error is (rate·step)⁴/384 times the fourth derivative's factor,
 * 24 for a density that falls as 1/(1 + rate·t).
 */
export class DenseLight {
  readonly #evolution: Evolution;
  readonly #medium: Medium;
  readonly #gamma: number;
  readonly #spreading: Float64Array;
  readonly #squares: Float64Array;
  readonly #squaresSpectrum: Float64Array;
  #before: Snapshot;
  #now: Snapshot;

  constructor(evolution: Evolution, medium: Medium) {
    this.#evolution = evolution;
    this.#medium = medium;
    this.#gamma = removalRate(medium);
    this.#spreading = modeRates(medium, evolution.grid).map((rate) => rate - this.#gamma);
    this.#squares = new Float64Array(evolution.free.length);
    this.#squaresSpectrum = evolution.transform.spectrum();
    this.#before = this.#empty();
    this.#now = this.#empty();
    this.#take(this.#now);
  }

  /** Age at the end of the latest step. */
  get age(): number {
    return this.#now.age;
  }

  /** To be called after each step. */
  stepped(): void {
    [this.#before, this.#now] = [this.#now, this.#before];
    this.#take(this.#now);
  }

  /** Adds the weighted spectra at times within the latest step. */
  add(samples: readonly Sample[], free: Float64Array, caught: Float64Array): void {
    const [n0, gain0, n1, gain1] = this.#weights(samples, this.#gamma);
    const [a, b] = [this.#before, this.#now];
    for (let i = 0; i < free.length; i++) {
      free[i] =
        free[i]! + n0 * a.free[i]! + gain0 * a.freeGain[i]! + n1 * b.free[i]! + gain1 * b.freeGain[i]!;
    }
    const { capture, trapLifetime } = this.#medium;
    if (capture === 0) return;
    const [m0, caught0, m1, caught1] = this.#weights(samples, 1 / trapLifetime);
    for (let i = 0; i < caught.length; i++) {
      caught[i] =
        caught[i]! +
        m0 * a.caught[i]! +
        m1 * b.caught[i]! +
        capture * (caught0 * a.free[i]! + caught1 * b.free[i]!);
    }
  }

  /** Hermite's cubic in the frame that decays with `rate`: weights of value and gain at both ends. */
  #weights(samples: readonly Sample[], rate: number): [number, number, number, number] {
    const from = this.#before.age;
    const h = this.#now.age - from;
    const sums: [number, number, number, number] = [0, 0, 0, 0];
    for (const { age, weight } of samples) {
      const s = (age - from) / h;
      const early = weight * Math.exp(-rate * (age - from));
      const late = weight * Math.exp(rate * (this.#now.age - age));
      sums[0] += early * (1 + 2 * s) * (1 - s) ** 2;
      sums[1] += early * h * s * (1 - s) ** 2;
      sums[2] += late * s * s * (3 - 2 * s);
      sums[3] += late * h * s * s * (s - 1);
    }
    return sums;
  }

  #take(snapshot: Snapshot): void {
    const { free, transform, caught, age } = this.#evolution;
    snapshot.age = age;
    transform.toSpectrum(free, snapshot.free);
    for (let i = 0; i < free.length; i++) this.#squares[i] = free[i]! * free[i]!;
    transform.toSpectrum(this.#squares, this.#squaresSpectrum);
    const { annihilation, repulsion } = this.#medium;
    for (let i = 0; i < snapshot.free.length; i++) {
      const spreading = this.#spreading[i >> 1]!;
      const meeting = annihilation + 0.5 * repulsion * spreading;
      snapshot.freeGain[i] = -spreading * snapshot.free[i]! - meeting * this.#squaresSpectrum[i]!;
    }
    snapshot.caught.set(caught);
  }

  #empty(): Snapshot {
    const spectrum = () => this.#evolution.transform.spectrum();
    return { age: 0, free: spectrum(), freeGain: spectrum(), caught: spectrum() };
  }
}
