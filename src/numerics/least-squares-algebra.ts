import { Matrix, QrDecomposition, SingularValueDecomposition, solve } from "ml-matrix";
import type { Point, WhitenedProblem } from "./least-squares-problem.ts";
import { factorCholesky, solveFactored } from "./linear-algebra.ts";

/** The parameters that may move: all but those at a bound which the gradient presses against it. */
function freeParameters(task: WhitenedProblem, point: Point, gradient: Float64Array): number[] {
  const free: number[] = [];
  for (let j = 0; j < task.n; j++) {
    const p = point.parameters[j]!;
    const held = (p <= task.lower[j]! && gradient[j]! <= 0) || (p >= task.upper[j]! && gradient[j]! >= 0);
    if (!held) free.push(j);
  }
  return free;
}

/** Jᵀr, length n: half the downhill slope of χ². */
function gradientOf(point: Point, jacobian: readonly Float64Array[]): Float64Array {
  return Float64Array.from(jacobian, (column) => dot(column, point.residuals));
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

/** JᵀJ and Jᵀr of the free parameters in the scaled coordinates u_j = p_j·d_j. */
export class NormalEquations {
  readonly free: readonly number[];
  /** d, length n: the largest norm so far of each column of J. */
  readonly scale: Float64Array;
  private readonly matrix: Float64Array;
  private readonly gradient: Float64Array;
  private readonly deviation: number;

  constructor(
    task: WhitenedProblem,
    point: Point,
    jacobian: readonly Float64Array[],
    earlierScale: Float64Array | undefined,
  ) {
    const slope = gradientOf(point, jacobian);
    this.free = freeParameters(task, point, slope);
    this.scale = Float64Array.from(
      jacobian,
      (column, j) => Math.max(Math.sqrt(dot(column, column)), earlierScale?.[j] ?? 0) || 1,
    );
    const k = this.free.length;
    this.matrix = new Float64Array(k * k);
    this.gradient = Float64Array.from(this.free, (j) => slope[j]! / this.scale[j]!);
    for (let a = 0; a < k; a++) {
      for (let b = 0; b <= a; b++) {
        const i = this.free[a]!;
        const j = this.free[b]!;
        const value = dot(jacobian[i]!, jacobian[j]!) / this.scale[i]! / this.scale[j]!;
        this.matrix[a * k + b] = value;
        this.matrix[b * k + a] = value;
      }
    }
    this.deviation = task.residualDeviation(point.chi2);
  }

  /**
   * The root mean square, over the parameters, of the remaining Gauss–Newton step in standard errors (Bates and Watts,
   * Technometrics 23 (1981) 179); Infinity where the matrix is singular.
   */
  relativeOffset(): number {
    const k = this.free.length;
    const factor = this.matrix.slice();
    if (!factorCholesky(factor, k)) return Number.POSITIVE_INFINITY;
    const step = this.gradient.slice();
    solveFactored(factor, k, step);
    return Math.sqrt(Math.max(dot(step, this.gradient), 0) / k) / this.deviation;
  }

  /** By how much the linear model says that χ² falls from `point` to `trial`. */
  predictedFall(point: Point, trial: Point): number {
    const k = this.free.length;
    const step = Float64Array.from(
      this.free,
      (j) => (trial.parameters[j]! - point.parameters[j]!) * this.scale[j]!,
    );
    let fall = 2 * dot(step, this.gradient);
    for (let a = 0; a < k; a++) fall -= step[a]! * dot(this.matrix.subarray(a * k, a * k + k), step);
    return fall;
  }
}

/** J = QR of the free parameters, with the columns of J scaled to norm 1. */
interface Triangle {
  readonly free: readonly number[];
  readonly norms: readonly number[];
  /** R, k×k for k free parameters. */
  readonly r: Matrix;
  /** Qᵀr of the residuals, length k. */
  readonly right: readonly number[];
}

/** R and Qᵀr at once, as the QR factor of [J r]. */
function triangleAt(task: WhitenedProblem, point: Point, jacobian: readonly Float64Array[]): Triangle {
  const free = freeParameters(task, point, gradientOf(point, jacobian));
  const columns = free.map((j) => jacobian[j]!);
  const norms = columns.map((column) => Math.sqrt(dot(column, column)) || 1);
  const k = free.length;
  const matrix = new Matrix(Math.max(task.m, k + 1), k + 1);
  for (let i = 0; i < task.m; i++) {
    for (let c = 0; c < k; c++) matrix.set(i, c, columns[c]![i]! / norms[c]!);
    matrix.set(i, k, point.residuals[i]!);
  }
  const upper = new QrDecomposition(matrix).upperTriangularMatrix;
  const right = Array.from({ length: k }, (_, row) => upper.get(row, k));
  return { free, norms, r: k > 0 ? upper.subMatrix(0, k - 1, 0, k - 1) : new Matrix(0, 0), right };
}

/** Below this fraction of the largest, a singular value of the scaled J is noise of its derivatives. */
function rankTolerance(task: WhitenedProblem): number {
  return task.hasJacobian ? 1e-13 : 1e-10;
}

export interface GaussNewtonStep {
  /** The parameters after the step. */
  readonly parameters: Float64Array;
  /** Length of the step in standard errors. */
  readonly offset: number;
  /** Its largest change of a parameter, relative to that parameter. */
  readonly relativeChange: number;
  readonly triangle: Triangle;
}

/** The undamped step of the free parameters by QR, which does not square the condition number. */
export function gaussNewtonStep(
  task: WhitenedProblem,
  point: Point,
  jacobian: readonly Float64Array[],
): GaussNewtonStep {
  const triangle = triangleAt(task, point, jacobian);
  const { free, norms, r, right } = triangle;
  const parameters = point.parameters.slice();
  if (free.length === 0) return { parameters, offset: 0, relativeChange: 0, triangle };
  const diagonal = r.diagonal().map(Math.abs);
  if (!(Math.min(...diagonal) > rankTolerance(task) * Math.max(...diagonal))) {
    const never = Number.POSITIVE_INFINITY;
    return { parameters, offset: never, relativeChange: never, triangle };
  }
  const step = solve(r, Matrix.columnVector([...right])).to1DArray();
  free.forEach((j, c) => {
    parameters[j]! += step[c]! / norms[c]!;
  });
  // ‖J·step‖ = ‖Qᵀr‖.
  const length = Math.sqrt(right.reduce((sum, value) => sum + value * value, 0) / free.length);
  return {
    parameters,
    offset: length === 0 ? 0 : length / task.residualDeviation(point.chi2),
    relativeChange: task.relativeChange(point.parameters, parameters),
    triangle,
  };
}

/**
 * s²(JᵀJ)⁻¹ from the singular values of R. A parameter with a share in a direction of no information is undetermined:
 * Infinity on the diagonal, zeros beside it.
 */
export function covarianceAt(
  task: WhitenedProblem,
  point: Point,
  { free, norms, r }: Triangle,
): { covariance: Float64Array; atBound: number[]; undetermined: number[] } {
  const { n } = task;
  const covariance = new Float64Array(n * n);
  const atBound = Array.from({ length: n }, (_, j) => j).filter((j) => !free.includes(j));
  if (free.length === 0) return { covariance, atBound, undetermined: [] };
  const { diagonal, rightSingularVectors: v } = new SingularValueDecomposition(r);
  const floor = rankTolerance(task) * Math.max(...diagonal);
  const informed = free.map((_, c) => diagonal[c]! > floor);
  const lost = (k: number) => informed.some((known, c) => !known && Math.abs(v.get(k, c)) > 1e-3);
  const variance = varianceFactor(task, point);
  const undetermined = free.filter((_, k) => lost(k) || variance === Number.POSITIVE_INFINITY);
  free.forEach((i, a) => {
    free.forEach((j, b) => {
      if (undetermined.includes(i) || undetermined.includes(j)) return;
      let sum = 0;
      for (let c = 0; c < free.length; c++) {
        if (informed[c]) sum += (v.get(a, c) * v.get(b, c)) / diagonal[c]! ** 2;
      }
      covariance[i * n + j] = (variance * sum) / norms[a]! / norms[b]!;
    });
  });
  for (const j of undetermined) covariance[j * (n + 1)] = Number.POSITIVE_INFINITY;
  return { covariance, atBound, undetermined };
}

function varianceFactor(task: WhitenedProblem, point: Point): number {
  if (task.hasSigma) return 1;
  return task.degreesOfFreedom > 0 ? point.chi2 / task.degreesOfFreedom : Number.POSITIVE_INFINITY;
}
