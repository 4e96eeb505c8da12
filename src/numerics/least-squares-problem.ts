import type { LeastSquaresProblem } from "./least-squares.ts";

/** The problem at one set of parameters. */
export interface Point {
  readonly parameters: Float64Array;
  /** f, length m. */
  readonly prediction: Float64Array;
  /** (y − f)/σ, length m. */
  readonly residuals: Float64Array;
  /** Infinity where the model is not finite. */
  readonly chi2: number;
}

/** A least-squares problem in units of its standard deviations: residuals, their derivatives, the bounds. */
export class WhitenedProblem {
  /** Number of points and of parameters. */
  readonly m: number;
  readonly n: number;
  readonly indices: Float64Array;
  readonly lower: Float64Array;
  readonly upper: Float64Array;
  readonly hasSigma: boolean;
  readonly hasJacobian: boolean;
  /** A χ² of rounding errors alone. */
  readonly negligibleChi2: number;
  private readonly problem: LeastSquaresProblem;
  private readonly y: Float64Array;
  private readonly inverseSigma: Float64Array;
  private readonly typical: Float64Array;

  constructor(problem: LeastSquaresProblem, sigma: ArrayLike<number> | undefined) {
    const m = problem.y.length;
    const n = problem.start.length;
    check(problem, sigma);
    this.problem = problem;
    this.m = m;
    this.n = n;
    this.hasSigma = sigma !== undefined;
    this.hasJacobian = problem.jacobian !== undefined;
    this.indices = Float64Array.from({ length: m }, (_, i) => i);
    this.y = new Float64Array(problem.y);
    this.inverseSigma = new Float64Array(m).fill(1);
    if (sigma) for (let i = 0; i < m; i++) this.inverseSigma[i] = 1 / sigma[i]!;
    this.lower = Float64Array.from({ length: n }, (_, j) => problem.lower?.[j] ?? Number.NEGATIVE_INFINITY);
    this.upper = Float64Array.from({ length: n }, (_, j) => problem.upper?.[j] ?? Number.POSITIVE_INFINITY);
    this.typical = Float64Array.from(
      { length: n },
      (_, j) => problem.scale?.[j] ?? (Math.abs(problem.start[j]!) || 1),
    );
    let size = 0;
    for (let i = 0; i < m; i++) size += (this.y[i]! * this.inverseSigma[i]!) ** 2;
    this.negligibleChi2 = (4 * Number.EPSILON) ** 2 * size;
  }

  get degreesOfFreedom(): number {
    return this.m - this.n;
  }

  /** The standard deviation of a whitened residual: 1 where σ is known, else estimated from the residuals. */
  residualDeviation(chi2: number): number {
    return this.hasSigma ? 1 : Math.sqrt(chi2 / Math.max(this.degreesOfFreedom, 1));
  }

  inside(p: Float64Array): boolean {
    return p.every((value, j) => value >= this.lower[j]! && value <= this.upper[j]!);
  }

  clamp(p: Float64Array): Float64Array {
    return p.map((value, j) => Math.min(Math.max(value, this.lower[j]!), this.upper[j]!));
  }

  relativeChange(from: Float64Array, to: Float64Array): number {
    const changes = from.map((p, j) => Math.abs(to[j]! - p) / Math.max(Math.abs(p), this.smallest(j)));
    return Math.max(...changes);
  }

  /** Sizes below this are as good as 0 for parameter j. */
  private smallest(j: number): number {
    return 1e-3 * this.typical[j]!;
  }

  at(parameters: Float64Array): Point {
    const prediction = new Float64Array(this.problem.prediction(parameters.slice()));
    const residuals = new Float64Array(this.m);
    let chi2 = 0;
    for (let i = 0; i < this.m; i++) {
      const r = (this.y[i]! - prediction[i]!) * this.inverseSigma[i]!;
      residuals[i] = r;
      chi2 += r * r;
    }
    return { parameters, prediction, residuals, chi2: Number.isNaN(chi2) ? Number.POSITIVE_INFINITY : chi2 };
  }

  /** Columns ∂f/∂p_j / σ, each of length m. */
  jacobianAt(point: Point): Float64Array[] {
    const { jacobian } = this.problem;
    const columns = jacobian
      ? Array.from(jacobian(point.parameters.slice()), (column) => new Float64Array(column))
      : Array.from({ length: this.n }, (_, j) => this.difference(point, j));
    for (const column of columns) {
      for (let i = 0; i < this.m; i++) column[i]! *= this.inverseSigma[i]!;
    }
    return columns;
  }

  /**
   * ∂f/∂p_j by central differences; the step (3ε)^(1/3) balances truncation and rounding (Press et al., Numerical
   * Recipes, 3rd ed., section 5.7). At a bound by the three-point rule towards the inside.
   */
  private difference(point: Point, j: number): Float64Array {
    const p = point.parameters.slice();
    const centre = p[j]!;
    const wish = 6e-6 * Math.max(Math.abs(centre), this.smallest(j));
    const h = centre + wish - centre;
    const valueAt = (offset: number): Float64Array => {
      p[j] = centre + offset;
      return new Float64Array(this.problem.prediction(p));
    };
    if (centre + h <= this.upper[j]! && centre - h >= this.lower[j]!) {
      const above = valueAt(h);
      const below = valueAt(-h);
      return above.map((value, i) => (value - below[i]!) / (2 * h));
    }
    const inward = centre + h > this.upper[j]! ? -h : h;
    const near = valueAt(inward);
    const far = valueAt(2 * inward);
    return near.map((value, i) => (4 * value - 3 * point.prediction[i]! - far[i]!) / (2 * inward));
  }
}

function check(problem: LeastSquaresProblem, sigma: ArrayLike<number> | undefined): void {
  const m = problem.y.length;
  const n = problem.start.length;
  if (n === 0) throw new RangeError("A fit needs at least one parameter.");
  if (m < 2) throw new RangeError(`A fit needs at least 2 points; there are ${m}.`);
  if (sigma && sigma.length !== m) throw new RangeError(`There are ${m} points but ${sigma.length} sigmas.`);
  for (let i = 0; i < m; i++) {
    if (!Number.isFinite(problem.y[i])) throw new RangeError(`Point ${i} of a fit is not finite.`);
    if (sigma && !(sigma[i]! > 0))
      throw new RangeError(`The sigma of point ${i} is ${sigma[i]}, not above 0.`);
  }
  for (const key of ["lower", "upper", "scale"] as const) {
    const given = problem[key];
    if (given && given.length !== n) {
      throw new RangeError(`There are ${n} parameters but ${given.length} entries of ${key}.`);
    }
  }
}
