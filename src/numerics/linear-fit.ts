import { Matrix, QrDecomposition, solve } from "ml-matrix";
import { factorCholesky } from "./linear-algebra.ts";

/** y = Σ_j p_j·x_j + noise. */
export interface LinearProblem {
  /** One column a parameter, each of length m. */
  readonly design: readonly ArrayLike<number>[];
  readonly y: ArrayLike<number>;
  /** Known standard deviations of independent points. */
  readonly sigma?: ArrayLike<number>;
  /**
   * For points that are correlated in groups: the inverse covariance of each group in turn, k×k, row-major, k being
   * the number of points in the group. Instead of sigma.
   */
  readonly precision?: readonly Float64Array[];
}

export interface LinearFit {
  readonly parameters: readonly number[];
  /** n×n, row-major. */
  readonly covariance: Float64Array;
  readonly standardErrors: readonly number[];
  /** Correlation of the parameters, n×n, row-major. */
  readonly correlation: Float64Array;
  /** rᵀV⁻¹r, or Σr² where no standard deviations are known. */
  readonly chi2: number;
  /** m − n. */
  readonly degreesOfFreedom: number;
  /** Length m. */
  readonly prediction: Float64Array;
}

/**
 * Generalised linear least squares, p = (XᵀV⁻¹X)⁻¹XᵀV⁻¹y with covariance (XᵀV⁻¹X)⁻¹, by QR of the whitened design with
 * columns of norm 1 (Golub and Van Loan, Matrix Computations, 4th ed. (2013), sections 5.3 and 6.1). Where neither
 * sigma nor precision is given, V = s²·1 with s² = Σr²/(m − n).
 *
 * @throws RangeError where the columns depend on each other or there are fewer points than parameters
 */
export function fitLinear(problem: LinearProblem): LinearFit {
  const m = problem.y.length;
  const n = problem.design.length;
  if (m < n) throw new RangeError(`A linear fit of ${n} parameters needs as many points; there are ${m}.`);
  const y = Float64Array.from(problem.y);
  const factors = problem.precision?.map(factored) ?? null;
  const white = (values: ArrayLike<number>) => whiten(Float64Array.from(values), problem.sigma, factors);
  const columns = problem.design.map(white);
  const norms = columns.map((column) => Math.sqrt(column.reduce((sum, v) => sum + v * v, 0)));
  const x = new Matrix(m, n);
  columns.forEach((column, j) => {
    for (let i = 0; i < m; i++) x.set(i, j, column[i]! / norms[j]!);
  });
  const qr = new QrDecomposition(x);
  const r = qr.upperTriangularMatrix;
  const diagonal = r.diagonal().map(Math.abs);
  if (!(Math.min(...diagonal) > 1e-14 * Math.max(...diagonal))) {
    throw new RangeError("The columns of a linear fit depend on each other.");
  }
  const parameters = solveRefined(qr, x, white(y)).map((value, j) => value / norms[j]!);
  const prediction = y.map((_, i) => parameters.reduce((sum, p, j) => sum + p * problem.design[j]![i]!, 0));
  const chi2 = white(y.map((value, i) => value - prediction[i]!)).reduce((sum, v) => sum + v * v, 0);
  const known = problem.sigma !== undefined || problem.precision !== undefined;
  const variance = known ? 1 : m > n ? chi2 / (m - n) : Number.POSITIVE_INFINITY;
  const inverse = solve(r, Matrix.eye(n, n));
  const unit = inverse.mmul(inverse.transpose());
  return {
    parameters,
    ...covarianceFrom(unit, norms, variance),
    chi2,
    degreesOfFreedom: m - n,
    prediction,
  };
}

/** The solution by QR, then corrected once with its own residuals. */
function solveRefined(qr: QrDecomposition, x: Matrix, y: Float64Array): number[] {
  const right = Matrix.columnVector(y);
  const first = qr.solve(right);
  return Matrix.add(first, qr.solve(Matrix.sub(right, x.mmul(first)))).to1DArray();
}

function covarianceFrom(unit: Matrix, norms: readonly number[], variance: number) {
  const n = norms.length;
  const covariance = new Float64Array(n * n);
  const correlation = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const value = unit.get(i, j);
      covariance[i * n + j] = (variance * value) / norms[i]! / norms[j]!;
      correlation[i * n + j] = i === j ? 1 : value / Math.sqrt(unit.get(i, i) * unit.get(j, j));
    }
  }
  const standardErrors = norms.map((_, j) => Math.sqrt(covariance[j * (n + 1)]!));
  return { covariance, correlation, standardErrors };
}

/** L of V⁻¹ = L·Lᵀ of one group of points. */
function factored(precision: Float64Array): Float64Array {
  const l = precision.slice();
  if (!factorCholesky(l, Math.round(Math.sqrt(l.length)))) {
    throw new RangeError("An inverse covariance is not positive definite.");
  }
  return l;
}

/** Divides by the square root of the noise's covariance, in place: Lᵀv for each group. */
function whiten(
  values: Float64Array,
  sigma: ArrayLike<number> | undefined,
  factors: readonly Float64Array[] | null,
): Float64Array {
  if (sigma) for (let i = 0; i < values.length; i++) values[i]! /= sigma[i]!;
  if (factors === null) return values;
  let first = 0;
  for (const l of factors) {
    const k = Math.round(Math.sqrt(l.length));
    for (let i = 0; i < k; i++) {
      let sum = 0;
      for (let row = i; row < k; row++) sum += l[row * k + i]! * values[first + row]!;
      values[first + i] = sum;
    }
    first += k;
  }
  if (first !== values.length) throw new RangeError("The inverse covariances do not cover all points.");
  return values;
}

/** A straight line y = intercept + slope·x: parameters in that order. */
export function fitLine(x: ArrayLike<number>, y: ArrayLike<number>, sigma?: ArrayLike<number>): LinearFit {
  const design = [new Float64Array(x.length).fill(1), x];
  return fitLinear(sigma ? { design, y, sigma } : { design, y });
}

/**
 * The fitted value where the design has the given row, Σ_j p_j·x_j, with its standard uncertainty √(xᵀCx): that of the
 * law itself, without the noise of a further observation.
 */
export function predictLinear(fit: LinearFit, row: readonly number[]): { value: number; u: number } {
  const n = fit.parameters.length;
  let value = 0;
  let variance = 0;
  for (let i = 0; i < n; i++) {
    value += row[i]! * fit.parameters[i]!;
    for (let j = 0; j < n; j++) variance += row[i]! * row[j]! * fit.covariance[i * n + j]!;
  }
  return { value, u: Math.sqrt(Math.max(variance, 0)) };
}
