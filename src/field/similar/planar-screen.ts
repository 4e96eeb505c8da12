import type { Flow } from "./flow.ts";
import { type LaguerreBasis, laguerreBasis } from "./laguerre-basis.ts";
import type { Optics } from "./optics.ts";
import { NEGLIGIBLE, narrowest, type Screen } from "./screen.ts";
import { StretchedAxis } from "./stretched-axis.ts";

export interface PlanarScreen extends Screen {
  readonly axes: readonly [StretchedAxis, StretchedAxis];
  /** Each state holds the quarter x₁x₂ > 0 and then, where blur is turned against the density, the quarter x₁x₂ < 0. */
  readonly quarters: 1 | 2;
}

/** Series in the blur's correlation end here. */
const MOST_TERMS = 60;

/**
 * Blur with correlation b is exp(b ∂₁∂₂): its even powers stay among functions even in x₁ and x₂, its odd powers give
 * functions odd in both, which add to the light in one quarter and lower it in the next. So seen light is
 * Σ e_kl P_k P_l G + ∂₁∂₂ Σ o_kl P_k P_l G.
 */
export function planarScreen(
  flow: Flow,
  optics: Optics,
  reach: readonly [number, number],
  step: number,
): PlanarScreen {
  const { blur, fourth } = optics;
  const along = new StretchedAxis(narrowest(flow, blur[0], 0), reach[0], step);
  const across = new StretchedAxis(narrowest(flow, blur[2], 1), reach[1], step);
  const quarters = blur[1] === 0 && fourth[1] === 0 && fourth[3] === 0 ? 1 : 2;
  const size = along.count * across.count;
  const values = flow.coefficients.map((coefficients, i) => {
    const s = flow.timeline.scales(flow.timeline.times[i]!);
    const seen = new SeenState(flow.shape.basis, coefficients, s, optics);
    const even = seen.even(along, across);
    if (quarters === 1) return even;
    const odd = seen.odd(along, across);
    const both = new Float64Array(2 * size);
    for (let p = 0; p < size; p++) {
      both[p] = even[p]! + odd[p]!;
      both[p + size] = even[p]! - odd[p]!;
    }
    return both;
  });
  return { axes: [along, across], quarters, values };
}

/** A state after blur and pixels. */
class SeenState {
  readonly #basis: LaguerreBasis;
  readonly #scale: readonly [number, number];
  readonly #even: Float64Array;
  readonly #odd: Float64Array;
  /** Coefficients below this do not matter. */
  readonly #enough: number;

  constructor(
    basis: LaguerreBasis,
    coefficients: Float64Array,
    s: readonly [number, number],
    { blur, fourth }: Optics,
  ) {
    this.#basis = basis;
    this.#scale = [s[0] + blur[0], s[1] + blur[2]];
    this.#even = damped(coefficients, basis.size, [s[0] / this.#scale[0], s[1] / this.#scale[1]]);
    this.#odd = new Float64Array(coefficients.length);
    this.#enough = NEGLIGIBLE * Math.abs(this.#even[0]!);
    this.#average(fourth);
    this.#correlate(blur[1]);
  }

  even(along: StretchedAxis, across: StretchedAxis): Float64Array {
    return onGrid(this.#even, this.#basis.size, this.#enough, (used, axis) =>
      evenTable(this.#basis, axis === 0 ? along : across, used, this.#scale[axis]),
    );
  }

  odd(along: StretchedAxis, across: StretchedAxis): Float64Array {
    const enough = this.#enough * Math.sqrt(this.#scale[0] * this.#scale[1]);
    return onGrid(this.#odd, this.#basis.size, enough, (used, axis) =>
      oddTable(this.#basis.size, axis === 0 ? along : across, used, this.#scale[axis]),
    );
  }

  /** The pixel's fourth-order term. */
  #average([xxxx, xxxy, xxyy, xyyy, yyyy]: Optics["fourth"]): void {
    const a = this.#even.slice();
    if (xxxx !== 0) {
      this.#addRaised(a, 2, 0, xxxx, this.#even);
      this.#addRaised(a, 1, 1, xxyy, this.#even);
      this.#addRaised(a, 0, 2, yyyy, this.#even);
    }
    if (xxxy !== 0) this.#addRaised(a, 1, 0, xxxy, this.#odd);
    if (xyyy !== 0) this.#addRaised(a, 0, 1, xyyy, this.#odd);
  }

  /** exp(b ∂₁∂₂) as its series. */
  #correlate(b: number): void {
    if (b === 0) return;
    let even: Float64Array = this.#even.slice();
    let odd: Float64Array = this.#odd.slice();
    for (let m = 1; m <= MOST_TERMS; m++) {
      const nextOdd = even.map((value) => (value * b) / m);
      const nextEven = new Float64Array(even.length);
      this.#addRaised(odd, 1, 1, b / m, nextEven);
      [even, odd] = [nextEven, nextOdd];
      addTo(this.#even, even);
      addTo(this.#odd, odd);
      if (largest(even) + largest(odd) / Math.sqrt(this.#scale[0] * this.#scale[1]) < this.#enough) break;
    }
  }

  /** Adds factor·∂₁^(2i) ∂₂^(2j) of `a`. */
  #addRaised(a: Float64Array, i: number, j: number, factor: number, out: Float64Array): void {
    const n = this.#basis.size;
    const [first, second] = [this.#raises(i, 0), this.#raises(j, 1)];
    for (let k = 0; k + i < n; k++) {
      for (let l = 0; l + j < n; l++) {
        const at = (k + i) * n + l + j;
        out[at] = out[at]! + factor * first[k]! * second[l]! * a[k * n + l]!;
      }
    }
  }

  #raises(times: number, axis: 0 | 1): Float64Array {
    const factors = new Float64Array(this.#basis.size).fill(1);
    for (let k = 0; k + times < factors.length; k++) {
      for (let m = 0; m < times; m++)
        factors[k] = (factors[k]! * this.#basis.raised(k + m)) / this.#scale[axis];
    }
    return factors;
  }
}

function damped(a: Float64Array, n: number, [first, second]: readonly [number, number]): Float64Array {
  const out = new Float64Array(a.length);
  for (let k = 0, alongX = 1; k < n; k++, alongX *= first) {
    for (let l = 0, damping = alongX; l < n; l++, damping *= second) out[k * n + l] = a[k * n + l]! * damping;
  }
  return out;
}

function addTo(sum: Float64Array, a: Float64Array): void {
  for (let i = 0; i < sum.length; i++) sum[i] = sum[i]! + a[i]!;
}

function largest(a: Float64Array): number {
  let most = 0;
  for (const value of a) most = Math.max(most, Math.abs(value));
  return most;
}

/** Σ_kl first[p][k]·a[k][l]·second[q][l], over the coefficients that matter. */
function onGrid(
  a: Float64Array,
  n: number,
  enough: number,
  table: (used: number, axis: 0 | 1) => Float64Array,
): Float64Array {
  const [rows, columns] = usedOf(a, n, enough);
  const [first, second] = [table(rows, 0), table(columns, 1)];
  const [points, others] = [first.length / rows, second.length / columns];
  const out = new Float64Array(points * others);
  const half = new Float64Array(columns);
  for (let p = 0; p < points; p++) {
    half.fill(0);
    for (let k = 0; k < rows; k++) {
      const f = first[p * rows + k]!;
      for (let l = 0; l < columns; l++) half[l] = half[l]! + f * a[k * n + l]!;
    }
    for (let q = 0; q < others; q++) {
      let sum = 0;
      for (let l = 0; l < columns; l++) sum += half[l]! * second[q * columns + l]!;
      out[p * others + q] = sum;
    }
  }
  return out;
}

function usedOf(a: Float64Array, n: number, enough: number): [rows: number, columns: number] {
  let [rows, columns] = [1, 1];
  for (let k = 0; k < n; k++) {
    for (let l = 0; l < n; l++) {
      if (Math.abs(a[k * n + l]!) <= enough) continue;
      rows = Math.max(rows, k + 1);
      columns = Math.max(columns, l + 1);
    }
  }
  return [rows, columns];
}

/** [point][k]: e^(−z) P_k(z)/√s along an axis. */
function evenTable(basis: LaguerreBasis, axis: StretchedAxis, used: number, scale: number): Float64Array {
  const table = new Float64Array(axis.count * used);
  for (let p = 0; p < axis.count; p++) {
    const z = axis.at(p) ** 2 / (2 * scale);
    if (z < 60) basis.evaluate(z, Math.exp(-z) / Math.sqrt(scale), used, table, p * used);
  }
  return table;
}

/**
 * [point][k]: −∂(e^(−z) P_k(z))/√s. As P_k is the Hermite polynomial He_2k/√(2k)!, this is
 * ξ·√(2k+1)·e^(−z)·P_k^(½)(z)/s with the polynomials for α = +½.
 */
function oddTable(size: number, axis: StretchedAxis, used: number, scale: number): Float64Array {
  const basis = laguerreBasis(0.5, size);
  const table = new Float64Array(axis.count * used);
  for (let p = 0; p < axis.count; p++) {
    const x = axis.at(p);
    const z = x ** 2 / (2 * scale);
    if (z >= 60) continue;
    basis.evaluate(z, (x * Math.exp(-z)) / scale ** 1.5, used, table, p * used);
    for (let k = 0; k < used; k++) table[p * used + k] = table[p * used + k]! * Math.sqrt(2 * k + 1);
  }
  return table;
}
