import { type LaguerreBasis, laguerreBasis } from "./laguerre-basis.ts";

/**
 * A density written as v = A(s)·e^(−z)·Σ a_k P_k(z) per axis, A = s₁^(−½) s₂^(−½), z_i = x_i²/(2 s_i): round (one
 * axis, the radius) or planar (two axes, a quarter of the plane). A state holds √w·Σ a_k P_k at the nodes of the Gauss
 * rule, which an orthogonal transform turns into the coefficients a_k and back.
 */
export interface Shape {
  readonly basis: LaguerreBasis;
  /** Numbers in a state. */
  readonly size: number;
  readonly planar: boolean;
  /** v = A·factors·state at the nodes. */
  readonly factors: Float64Array;
  /** A Gaussian of peak 1 at s = 1. */
  start(): Float64Array;
  toCoefficients(state: Float64Array, out: Float64Array): void;
  toState(coefficients: Float64Array, out: Float64Array): void;
  /** Diffusion from the scales s to the scales `to`: each coefficient shrinks by its own (s/to)^k. */
  diffuse(state: Float64Array, from: readonly [number, number], to: readonly [number, number]): void;
  /** The same for coefficients. */
  damp(coefficients: Float64Array, from: readonly [number, number], to: readonly [number, number]): void;
  /** Adds Σ_i factors_i·s_i·∂_i² of what has the coefficients `a`, as coefficients. */
  addCurvature(a: Float64Array, factors: readonly [number, number], out: Float64Array): void;
}

export function shapeOf(round: boolean, size: number): Shape {
  return round ? new RoundShape(size) : new PlanarShape(size);
}

class RoundShape implements Shape {
  readonly planar = false;
  readonly basis: LaguerreBasis;
  readonly size: number;
  readonly factors: Float64Array;
  readonly #work: Float64Array;

  constructor(size: number) {
    this.size = size;
    this.basis = laguerreBasis(0, size);
    this.factors = axisFactors(this.basis);
    this.#work = new Float64Array(size);
  }

  start(): Float64Array {
    return this.basis.rootWeights.slice();
  }

  toCoefficients(state: Float64Array, out: Float64Array): void {
    transform(this.basis.vectors, state, this.size, out);
  }

  diffuse(state: Float64Array, from: readonly [number, number], to: readonly [number, number]): void {
    this.toCoefficients(state, this.#work);
    this.damp(this.#work, from, to);
    this.toState(this.#work, state);
  }

  toState(coefficients: Float64Array, out: Float64Array): void {
    const n = this.size;
    const { vectors } = this.basis;
    out.fill(0);
    for (let k = 0; k < n; k++) {
      const a = coefficients[k]!;
      for (let j = 0; j < n; j++) out[j] = out[j]! + a * vectors[k * n + j]!;
    }
  }

  damp(coefficients: Float64Array, from: readonly [number, number], to: readonly [number, number]): void {
    let damping = 1;
    for (let k = 0; k < this.size; k++) {
      coefficients[k] = coefficients[k]! * damping;
      damping *= from[0] / to[0];
    }
  }

  addCurvature(a: Float64Array, [factor]: readonly [number, number], out: Float64Array): void {
    for (let k = 0; k + 1 < this.size; k++) out[k + 1] = out[k + 1]! + factor * this.basis.raised(k) * a[k]!;
  }
}

class PlanarShape implements Shape {
  readonly planar = true;
  readonly basis: LaguerreBasis;
  readonly size: number;
  readonly factors: Float64Array;
  readonly #back: Float64Array;
  readonly #work: Float64Array;
  readonly #coefficients: Float64Array;

  constructor(size: number) {
    this.size = size * size;
    this.basis = laguerreBasis(-0.5, size);
    this.factors = outer(axisFactors(this.basis));
    this.#back = transposed(this.basis.vectors, size);
    this.#work = new Float64Array(this.size);
    this.#coefficients = new Float64Array(this.size);
  }

  start(): Float64Array {
    return outer(this.basis.rootWeights);
  }

  toCoefficients(state: Float64Array, out: Float64Array): void {
    const n = this.basis.size;
    multiply(this.basis.vectors, state, n, this.#work);
    multiply(this.#work, this.#back, n, out);
  }

  diffuse(state: Float64Array, from: readonly [number, number], to: readonly [number, number]): void {
    const a = this.#coefficients;
    this.toCoefficients(state, a);
    this.damp(a, from, to);
    this.toState(a, state);
  }

  toState(coefficients: Float64Array, out: Float64Array): void {
    const n = this.basis.size;
    multiply(this.#back, coefficients, n, this.#work);
    multiply(this.#work, this.basis.vectors, n, out);
  }

  damp(a: Float64Array, from: readonly [number, number], to: readonly [number, number]): void {
    const n = this.basis.size;
    let alongX = 1;
    for (let k = 0; k < n; k++) {
      let damping = alongX;
      for (let l = 0; l < n; l++) {
        a[k * n + l] = a[k * n + l]! * damping;
        damping *= from[1] / to[1];
      }
      alongX *= from[0] / to[0];
    }
  }

  addCurvature(a: Float64Array, [first, second]: readonly [number, number], out: Float64Array): void {
    const n = this.basis.size;
    for (let k = 0; k < n; k++) {
      const along = first * this.basis.raised(k);
      for (let l = 0; l < n; l++) {
        const value = a[k * n + l]!;
        if (k + 1 < n) out[(k + 1) * n + l] = out[(k + 1) * n + l]! + along * value;
        if (l + 1 < n) out[k * n + l + 1] = out[k * n + l + 1]! + second * this.basis.raised(l) * value;
      }
    }
  }
}

function axisFactors({ z, rootWeights }: LaguerreBasis): Float64Array {
  return z.map((value, j) => Math.exp(-value) / rootWeights[j]!);
}

function outer(a: Float64Array): Float64Array {
  const out = new Float64Array(a.length ** 2);
  for (let i = 0; i < a.length; i++) for (let j = 0; j < a.length; j++) out[i * a.length + j] = a[i]! * a[j]!;
  return out;
}

function transposed(a: Float64Array, n: number): Float64Array {
  return a.map((_, i) => a[(i % n) * n + Math.floor(i / n)]!);
}

function transform(matrix: Float64Array, state: Float64Array, n: number, out: Float64Array): void {
  for (let k = 0; k < n; k++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += matrix[k * n + j]! * state[j]!;
    out[k] = sum;
  }
}

/** out = a·b for n × n matrices, row-major. */
function multiply(a: Float64Array, b: Float64Array, n: number, out: Float64Array): void {
  for (let i = 0; i < n; i++) {
    const row = i * n;
    for (let j = 0; j < n; j++) out[row + j] = 0;
    for (let k = 0; k < n; k++) {
      const value = a[row + k]!;
      const from = k * n;
      for (let j = 0; j < n; j++) out[row + j] = out[row + j]! + value * b[from + j]!;
    }
  }
}
