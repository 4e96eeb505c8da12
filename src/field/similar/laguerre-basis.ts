import { EigenvalueDecomposition, Matrix } from "ml-matrix";

/**
 * Orthonormal polynomials P_k(z) for the weight z^α e^(−z)/Γ(1+α), with their Gauss rule.
 *
 * With z = ξ²/2 they carry even functions along one axis (α = −½: the even Hermite polynomials) and round functions in
 * the plane (α = 0: the Laguerre polynomials). The heat equation maps a Gaussian times P_k to the same at the new width:
 * with s = 1 + 2dt, s^(−1−α) e^(−z) P_k(z), z = x²/2s, is multiplied by (s₀/s₁)^k, because it is ∂^(2k) of the spreading
 * Gaussian up to a factor (Abramowitz and Stegun 22.5.40 and 22.11.8, 22.11.6).
 */
export class LaguerreBasis {
  readonly size: number;
  /** Nodes of the Gauss rule. */
  readonly z: Float64Array;
  /** Orthogonal matrix [k][j] = √w_j·P_k(z_j), row-major: node values times √w to coefficients, and back by its transpose. */
  readonly vectors: Float64Array;
  /** √w_j; the weights add up to 1. */
  readonly rootWeights: Float64Array;
  /** z P_k = b_(k+1) P_(k+1) + (2k+1+α) P_k + b_k P_(k−1) with b_k = √(k(k+α)). */
  readonly #alpha: number;
  readonly #next: Float64Array;
  /** 1/b_(k+1) */
  readonly #inverse: Float64Array;

  constructor(alpha: number, size: number) {
    this.size = size;
    this.#alpha = alpha;
    this.#next = Float64Array.from({ length: size + 1 }, (_, k) => Math.sqrt(k * (k + alpha)));
    this.#inverse = this.#next.slice(1).map((b) => 1 / b);
    const jacobi = Matrix.zeros(size, size);
    for (let k = 0; k < size; k++) {
      jacobi.set(k, k, 2 * k + 1 + alpha);
      if (k === 0) continue;
      jacobi.set(k, k - 1, this.#next[k]!);
      jacobi.set(k - 1, k, this.#next[k]!);
    }
    // Golub and Welsch 1969: nodes are eigenvalues; the tiny weights of far nodes are exact only by recurrence
    this.z = Float64Array.from(
      new EigenvalueDecomposition(jacobi, { assumeSymmetric: true }).realEigenvalues,
    ).sort();
    this.vectors = new Float64Array(size * size);
    this.rootWeights = new Float64Array(size);
    const column = new Float64Array(size);
    for (let j = 0; j < size; j++) {
      this.evaluate(this.z[j]!, 1, size, column, 0);
      const weight = 1 / Math.hypot(...column);
      this.rootWeights[j] = weight;
      for (let k = 0; k < size; k++) this.vectors[k * size + j] = weight * column[k]!;
    }
  }

  /** first·P_k(z) for k < count, written from out[at]. */
  evaluate(z: number, first: number, count: number, out: Float64Array, at: number): void {
    let before = 0;
    let now = first;
    for (let k = 0; k < count; k++) {
      out[at + k] = now;
      const after = ((z - 2 * k - 1 - this.#alpha) * now - this.#next[k]! * before) * this.#inverse[k]!;
      before = now;
      now = after;
    }
  }

  /** first·Σ a_k·P_k(z) over k < count, without a row to write to and without divisions. */
  sum(z: number, first: number, a: Float64Array, count: number): number {
    const [next, inverse, shift] = [this.#next, this.#inverse, z - 1 - this.#alpha];
    let before = 0;
    let now = first;
    let sum = 0;
    for (let k = 0; k < count; k++) {
      sum += a[k]! * now;
      const after = ((shift - 2 * k) * now - next[k]! * before) * inverse[k]!;
      before = now;
      now = after;
    }
    return sum;
  }

  /** ∂²(e^(−z) P_k) = raised(k)/s·e^(−z) P_(k+1) along an axis; the Laplacian for round functions. */
  raised(k: number): number {
    return 2 * this.#next[k + 1]!;
  }
}

const made = new Map<string, LaguerreBasis>();

/** Bases are the same for every problem and are made once. */
export function laguerreBasis(alpha: number, size: number): LaguerreBasis {
  const key = `${alpha} ${size}`;
  const basis = made.get(key) ?? new LaguerreBasis(alpha, size);
  made.set(key, basis);
  return basis;
}
