import { createRandom } from "./random.ts";

/** An input quantity: best estimate and standard uncertainty. */
export interface Input {
  readonly value: number;
  readonly u: number;
}

/** What one input does to the result. */
export interface BudgetRow {
  /** ∂f/∂x at the estimates. */
  readonly sensitivity: number;
  /** |∂f/∂x|·u(x), in the unit of the result. */
  readonly contribution: number;
}

export interface Propagated {
  readonly value: number;
  /** Combined standard uncertainty. */
  readonly u: number;
  /** One an input, in order. With correlated inputs their squares do not add up to u². */
  readonly rows: readonly BudgetRow[];
}

type Measurement = (x: readonly number[]) => number;

/**
 * The law of propagation of uncertainty, u² = Σ_i Σ_j c_i c_j u_i u_j r_ij with c_i = ∂f/∂x_i (JCGM 100:2008,
 * equation 16).
 *
 * @param correlation n×n, row-major; without it the inputs are independent
 * @param sensitivities c_i where they are known; otherwise they are taken by central differences
 */
export function propagate(
  f: Measurement,
  inputs: readonly Input[],
  correlation?: ArrayLike<number>,
  sensitivities?: readonly number[],
): Propagated {
  const slopes = sensitivities ?? differentiate(f, inputs);
  return {
    value: f(inputs.map((input) => input.value)),
    u: Math.sqrt(Math.max(bilinear(slopes, slopes, inputs, correlation), 0)),
    rows: slopes.map((sensitivity, i) => ({
      sensitivity,
      contribution: Math.abs(sensitivity) * inputs[i]!.u,
    })),
  };
}

/**
 * Several results of the same inputs, with the covariance that they share (JCGM 100:2008, H.2.3, equation H.9).
 *
 * @returns covariance k×k, row-major, of the k results
 */
export function propagateTogether(
  functions: readonly Measurement[],
  inputs: readonly Input[],
  correlation?: ArrayLike<number>,
): { results: Propagated[]; covariance: Float64Array } {
  const results = functions.map((f) => propagate(f, inputs, correlation));
  const slopes = results.map((result) => result.rows.map((row) => row.sensitivity));
  const covariance = slopes.flatMap((a) => slopes.map((b) => bilinear(a, b, inputs, correlation)));
  return { results, covariance: Float64Array.from(covariance) };
}

function bilinear(
  a: readonly number[],
  b: readonly number[],
  inputs: readonly Input[],
  correlation: ArrayLike<number> | undefined,
): number {
  const n = inputs.length;
  let sum = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const r = i === j ? 1 : (correlation?.[i * n + j] ?? 0);
      sum += a[i]! * inputs[i]!.u * r * inputs[j]!.u * b[j]!;
    }
  }
  return sum;
}

/** Central differences with the step (3ε)^(1/3) of the input's size (Press et al., Numerical Recipes, section 5.7). */
function differentiate(f: Measurement, inputs: readonly Input[]): number[] {
  const x = inputs.map((input) => input.value);
  return inputs.map(({ value, u }, i) => {
    const h = 6e-6 * (Math.abs(value) || u || 1);
    const above = x.with(i, value + h);
    const below = x.with(i, value - h);
    return (f(above) - f(below)) / (above[i]! - below[i]!);
  });
}

export interface Distributed {
  readonly mean: number;
  /** Standard deviation of the draws. */
  readonly u: number;
  /** The probabilistically symmetric 95 % interval: 2.5 % of the draws lie below it and 2.5 % above. */
  readonly interval95: readonly [lo: number, hi: number];
  /** Draws for which f had no finite value; they are in none of the numbers above. */
  readonly invalid: number;
}

/**
 * Propagation of distributions: f of many draws from the normal distribution of the inputs (JCGM 101:2008, sections
 * 5.9, 6.4.8 and 7). With 100,000 draws an end of the interval is good to about 0.01 u.
 *
 * Systematic components are inputs like the others, each drawn once for every draw of f.
 *
 * @param correlation n×n, row-major; without it the inputs are independent
 * @throws RangeError where the correlation is impossible, or fewer than half of the draws have a finite value
 */
export function propagateByMonteCarlo(
  f: Measurement,
  inputs: readonly Input[],
  options: { correlation?: ArrayLike<number>; draws?: number; seed: number },
): Distributed {
  const { correlation, draws = 100_000, seed } = options;
  const n = inputs.length;
  const root = correlation ? rootOf(correlation, n) : null;
  const random = createRandom(seed);
  const drawn = new Float64Array(draws);
  const z = new Float64Array(n);
  const x = new Array<number>(n).fill(0);
  let valid = 0;
  for (let k = 0; k < draws; k++) {
    for (let i = 0; i < n; i++) z[i] = random.normal();
    for (let i = 0; i < n; i++) x[i] = inputs[i]!.value + inputs[i]!.u * (root ? row(root, n, i, z) : z[i]!);
    const value = f(x);
    if (Number.isFinite(value)) drawn[valid++] = value;
  }
  if (valid < draws / 2)
    throw new RangeError("Most draws of a Monte Carlo propagation have no finite value.");
  return { ...describe(drawn.subarray(0, valid)), invalid: draws - valid };
}

function row(root: Float64Array, n: number, i: number, z: Float64Array): number {
  let sum = 0;
  for (let j = 0; j <= i; j++) sum += root[i * n + j]! * z[j]!;
  return sum;
}

/** L with L·Lᵀ = R, for a correlation matrix that may be singular (inputs that are the same thing twice). */
function rootOf(correlation: ArrayLike<number>, n: number): Float64Array {
  const l = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let rest = i === j ? 1 : correlation[i * n + j]!;
      for (let k = 0; k < j; k++) rest -= l[i * n + k]! * l[j * n + k]!;
      const pivot = l[j * n + j]!;
      if (i === j) {
        if (rest < -1e-9) throw new RangeError("A correlation matrix is not positive semi-definite.");
        l[i * n + i] = rest > 1e-12 ? Math.sqrt(rest) : 0;
      } else l[i * n + j] = pivot > 0 ? rest / pivot : 0;
    }
  }
  return l;
}

function describe(draws: Float64Array): Omit<Distributed, "invalid"> {
  const count = draws.length;
  let sum = 0;
  for (const value of draws) sum += value;
  const mean = sum / count;
  let squares = 0;
  for (const value of draws) squares += (value - mean) ** 2;
  draws.sort();
  // JCGM 101, 7.7.2: q = 0.95 M draws lie between the ends, the same number on either side.
  const q = Math.round(0.95 * count);
  const low = Math.floor((count - q) / 2);
  const high = Math.min(low + q, count - 1);
  return { mean, u: Math.sqrt(squares / (count - 1)), interval95: [draws[low]!, draws[high]!] };
}
