import { levenbergMarquardt } from "ml-levenberg-marquardt";
import {
  covarianceAt,
  type GaussNewtonStep,
  gaussNewtonStep,
  NormalEquations,
} from "./least-squares-algebra.ts";
import { type Point, WhitenedProblem } from "./least-squares-problem.ts";

/** A general nonlinear least-squares problem: y_i = f_i(p) + noise of standard deviation σ_i. */
export interface LeastSquaresProblem {
  /** The model at every point, length m. `p` is reused between calls: copy it to keep it. */
  readonly prediction: (p: Float64Array) => ArrayLike<number>;
  /**
   * Its derivatives, one array of length m for each parameter. Without it they are taken by central differences
   * (two predictions a parameter, nine to ten good digits).
   */
  readonly jacobian?: (p: Float64Array) => readonly ArrayLike<number>[];
  readonly y: ArrayLike<number>;
  /**
   * Known standard deviations; or a function that gives them from the prediction, which is then re-evaluated at each
   * new fit until nothing moves. Without it the covariance is scaled by the residual variance χ²/(m − n).
   */
  readonly sigma?: ArrayLike<number> | ((prediction: Float64Array) => ArrayLike<number>);
  readonly start: readonly number[];
  /** Bounds, ±Infinity where there is none. */
  readonly lower?: readonly number[];
  readonly upper?: readonly number[];
  /** The size of a change that matters, for a parameter that may be 0; by default |start|, or 1 for 0. */
  readonly scale?: readonly number[];
  /** Steps of the library, accepted or not. Default 500. */
  readonly maxIterations?: number;
}

export interface LeastSquaresFit {
  readonly parameters: readonly number[];
  /**
   * n×n, row-major. A parameter that the data do not determine has Infinity on the diagonal and zeros beside it; one
   * that stands at a bound is held there and has zeros alone.
   */
  readonly covariance: Float64Array;
  /** Square roots of the diagonal. */
  readonly standardErrors: readonly number[];
  /** Σ((y − f)/σ)², or Σ(y − f)² without σ. */
  readonly chi2: number;
  /** m − n, bounds or not. */
  readonly degreesOfFreedom: number;
  /** A minimum was reached and the data determine every parameter that is not at a bound. */
  readonly converged: boolean;
  /** How the fit ended, in words. */
  readonly reason: string;
  /** Steps of the library, accepted or not, and of the final refinement. */
  readonly iterations: number;
  /** f at the parameters, length m. */
  readonly prediction: Float64Array;
  /** Indices of parameters that ended at a bound. */
  readonly atBound: readonly number[];
  /** Indices of parameters that the data do not determine. */
  readonly undetermined: readonly number[];
}

/**
 * Minimises χ²(p) = Σ((y_i − f_i(p))/σ_i)² and gives the covariance s²(JᵀJ)⁻¹ of the parameters, s² = 1 with known σ
 * and χ²/(m − n) without (Bates and Watts, Nonlinear Regression Analysis (1988), chapter 2).
 *
 * Every Levenberg–Marquardt step, that is the damped normal equations (JᵀJ + λ·1)·u = Jᵀr and the clamping to the
 * bounds, is made by `ml-levenberg-marquardt`, one step a call. What that library lacks is added around it:
 * - parameters scaled by the largest norm so far of their column of J, so that λ has no unit (Moré, Lect. Notes
 *   Math. 630 (1978) 105);
 * - a step is taken only where χ² falls, and λ follows the ratio of the fall to the predicted one (Nielsen, Technical
 *   University of Denmark, report IMM-REP-1999-05);
 * - a stop that knows no units: the relative offset of Bates and Watts, Technometrics 23 (1981) 179, the length of the
 *   remaining step in standard errors, below 1e-8;
 * - restarts from the best point with fresh scales and damping where no step helps, and a second descent with short
 *   steps where the first found no minimum;
 * - at the end a few Gauss–Newton steps by QR, which does not square the condition number as the normal equations do;
 * - parameters that press against a bound are held there until the gradient turns;
 * - covariance by QR and singular values, and the parameters that the data do not determine.
 *
 * The result is never worse than the start (with σ as a function: than the start under the final σ).
 *
 * @throws RangeError where the arrays do not fit together
 */
export function fitLeastSquares(problem: LeastSquaresProblem): LeastSquaresFit {
  const { sigma } = problem;
  if (typeof sigma !== "function") return fitOnce(problem, sigma);
  let fit = fitOnce(problem, sigma(predictionAtStart(problem)));
  let iterations = fit.iterations;
  for (let round = 0; round < MAX_REWEIGHTINGS; round++) {
    const next = fitOnce({ ...problem, start: fit.parameters }, sigma(fit.prediction));
    iterations += next.iterations;
    const settled = next.parameters.every(
      (p, j) =>
        Math.abs(p - fit.parameters[j]!) <= 1e-6 * Math.max(next.standardErrors[j]!, 1e-9 * Math.abs(p)),
    );
    fit = { ...next, iterations };
    if (settled) return fit;
  }
  return { ...fit, converged: false, reason: "the weights did not settle" };
}

const MAX_REWEIGHTINGS = 50;
const MAX_RESTARTS = 3;
const OFFSET_TOLERANCE = 1e-8;
const MAX_DAMPING = 1e12;
const MIN_DAMPING = 1e-15;
/** λ where the matrix has a unit diagonal: nearly Gauss–Newton, and a hundredth of the steepest descent. */
const BOLD_DAMPING = 1e-3;
const CAUTIOUS_DAMPING = 100;

function predictionAtStart(problem: LeastSquaresProblem): Float64Array {
  return Float64Array.from(problem.prediction(Float64Array.from(problem.start)));
}

function fitOnce(problem: LeastSquaresProblem, sigma: ArrayLike<number> | undefined): LeastSquaresFit {
  const task = new WhitenedProblem(problem, sigma);
  const start = task.at(task.clamp(Float64Array.from(problem.start)));
  if (!Number.isFinite(start.chi2)) return notFinite(task, start);
  const limit = problem.maxIterations ?? 500;
  const bold = refine(task, descend(task, start, limit, BOLD_DAMPING));
  if (bold.converged || bold.iterations >= limit) return bold;
  const cautious = refine(task, descend(task, start, limit - bold.iterations, CAUTIOUS_DAMPING));
  const better = cautious.chi2 < bold.chi2 ? cautious : bold;
  return { ...better, iterations: bold.iterations + cautious.iterations };
}

interface Descent {
  readonly point: Point;
  readonly jacobian: Float64Array[];
  readonly iterations: number;
  readonly end: "converged" | "exact" | "stalled" | "iterations";
}

/** Library steps until the relative offset vanishes or nothing helps. */
function descend(task: WhitenedProblem, start: Point, maxIterations: number, startDamping: number): Descent {
  let point = start;
  let jacobian = task.jacobianAt(point);
  let equations = new NormalEquations(task, point, jacobian, undefined);
  let damping = startDamping;
  let growth = 2;
  let restarts = 0;
  let improved = false;
  const ended = (end: Descent["end"], iterations: number): Descent => ({ point, jacobian, iterations, end });
  for (let iteration = 0; iteration < maxIterations; iteration++) {
    if (point.chi2 <= task.negligibleChi2) return ended("exact", iteration);
    if (equations.free.length === 0 || equations.relativeOffset() < OFFSET_TOLERANCE) {
      return ended("converged", iteration);
    }
    const trial = libraryStep(task, point, jacobian, equations, damping);
    if (trial) {
      const ratio = (point.chi2 - trial.chi2) / equations.predictedFall(point, trial);
      damping = Math.max(damping * Math.max(1 / 9, 1 - (2 * ratio - 1) ** 3), MIN_DAMPING);
      growth = 2;
      improved = true;
      point = trial;
      jacobian = task.jacobianAt(point);
      equations = new NormalEquations(task, point, jacobian, equations.scale);
      continue;
    }
    damping *= growth;
    growth *= 2;
    if (damping > MAX_DAMPING) {
      if (!improved || restarts >= MAX_RESTARTS) return ended("stalled", iteration + 1);
      restarts += 1;
      improved = false;
      damping = startDamping;
      growth = 2;
      equations = new NormalEquations(task, point, jacobian, undefined);
    }
  }
  return ended("iterations", maxIterations);
}

/**
 * One step of the library from `point`, in the scaled offsets u = (p − p₀)·d of the free parameters.
 * @returns the new point, or null where χ² does not fall
 */
function libraryStep(
  task: WhitenedProblem,
  point: Point,
  jacobian: Float64Array[],
  { free, scale }: NormalEquations,
  damping: number,
): Point | null {
  let trial = point;
  const at = (u: ArrayLike<number>): Point => {
    const p = point.parameters.slice();
    free.forEach((j, k) => {
      p[j]! += u[k]! / scale[j]!;
    });
    return task.at(task.clamp(p));
  };
  const bound = (limits: Float64Array) => free.map((j) => (limits[j]! - point.parameters[j]!) * scale[j]!);
  const partials = new Array<number>(free.length).fill(0);
  levenbergMarquardt(
    { x: task.indices, y: point.residuals },
    (u) => {
      if (u.every((value) => value === 0)) return () => 0;
      trial = at(u);
      const { residuals } = trial;
      return (i) => point.residuals[i]! - residuals[i]!;
    },
    {
      initialValues: new Float64Array(free.length),
      minValues: bound(task.lower),
      maxValues: bound(task.upper),
      damping,
      maxIterations: 1,
      errorTolerance: 0,
      jacobianFunction: () => (i) => {
        for (let k = 0; k < free.length; k++) partials[k] = jacobian[free[k]!]![i]! / scale[free[k]!]!;
        return partials;
      },
    },
  );
  return trial.chi2 < point.chi2 ? trial : null;
}

/** Gauss–Newton steps by QR while they shrink, then the covariance. */
function refine(task: WhitenedProblem, descent: Descent): LeastSquaresFit {
  let { point, jacobian, iterations } = descent;
  let last = Number.POSITIVE_INFINITY;
  let step = gaussNewtonStep(task, point, jacobian);
  for (let round = 0; round < 10 && step.offset < last / 2 && step.offset > 1e-9; round++) {
    const trial = task.at(step.parameters);
    const slack = 1e-12 * point.chi2 + task.negligibleChi2;
    if (!task.inside(step.parameters) || !(trial.chi2 <= point.chi2 + slack)) break;
    last = step.offset;
    point = trial;
    jacobian = task.jacobianAt(point);
    step = gaussNewtonStep(task, point, jacobian);
    iterations += 1;
  }
  // A last step of no digit that matters is as good as none: the case of data that the model meets to rounding.
  const settled = step.relativeChange < 1e-9 ? 0 : Math.min(step.offset, last);
  return summarise(task, { ...descent, point, iterations }, step, settled);
}

function summarise(
  task: WhitenedProblem,
  { point, iterations, end }: Descent,
  { triangle }: GaussNewtonStep,
  offset: number,
): LeastSquaresFit {
  const { covariance, atBound, undetermined } = covarianceAt(task, point, triangle);
  const minimum = end === "converged" || end === "exact" || offset < 1e-5;
  const parameters = Array.from(point.parameters);
  return {
    parameters,
    covariance,
    standardErrors: parameters.map((_, j) => Math.sqrt(covariance[j * (parameters.length + 1)]!)),
    chi2: point.chi2,
    degreesOfFreedom: task.degreesOfFreedom,
    converged: minimum && undetermined.length === 0,
    reason: reasonOf(minimum, end, undetermined),
    iterations,
    prediction: point.prediction,
    atBound,
    undetermined,
  };
}

function reasonOf(minimum: boolean, end: Descent["end"], undetermined: readonly number[]): string {
  if (undetermined.length > 0) return "the data do not determine every parameter";
  if (end === "exact") return "the model meets the data exactly";
  if (minimum) return "minimum reached";
  return end === "stalled" ? "no step lowers the sum of squares" : "iteration limit reached";
}

function notFinite(task: WhitenedProblem, start: Point): LeastSquaresFit {
  const n = start.parameters.length;
  const covariance = new Float64Array(n * n);
  for (let j = 0; j < n; j++) covariance[j * (n + 1)] = Number.POSITIVE_INFINITY;
  return {
    parameters: Array.from(start.parameters),
    covariance,
    standardErrors: new Array<number>(n).fill(Number.POSITIVE_INFINITY),
    chi2: Number.POSITIVE_INFINITY,
    degreesOfFreedom: task.degreesOfFreedom,
    converged: false,
    reason: "the model is not finite at the start",
    iterations: 0,
    prediction: start.prediction,
    atBound: [],
    undetermined: Array.from({ length: n }, (_, j) => j),
  };
}
