import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { fitLeastSquares, type LeastSquaresFit } from "../numerics/least-squares.ts";
import { invertSymmetric } from "../numerics/linear-algebra.ts";
import { correctedAkaike } from "../numerics/model-choice.ts";
import type { Law } from "./law.ts";
import type { DecayFit, DerivedTime, LightData } from "./light.ts";

/** What a law's fit needs beside the data: where to begin, how far to go, and when its result is no result. */
export interface LawTask {
  readonly law: Law;
  /** The same law for other delays, transmission 1. */
  readonly lawAt: (delays: ArrayLike<number>) => Law;
  readonly start: readonly number[];
  readonly lower: readonly number[];
  readonly upper: readonly number[];
  /** Why a minimum of this law is not to be used, or null. */
  readonly objection: (p: Float64Array, covariance: Float64Array) => string | null;
  /** Puts exchangeable parameters into their order. */
  readonly arrange?: (p: Float64Array) => void;
}

/** Least squares with fixed sigma. Positive parameters are fitted as logarithms; all that is returned is in plain units. */
export function fitLaw(task: LawTask, data: LightData): DecayFit {
  const { law } = task;
  const frames = data.light.length;
  const value = new Float64Array(frames);
  const jacobian = law.names.map(() => new Float64Array(frames));
  const fit = minimise(task, data, value, jacobian);
  const parameters = fromCoordinates(law, fit.parameters);
  task.arrange?.(parameters);
  law.evaluate(parameters, value, jacobian);
  const covariance = covarianceOf(jacobian, data.sigma);
  const degreesOfFreedom = frames - parameters.length;
  const problem = whyUseless(task, fit, parameters, covariance);
  const uncertainties = covariance ?? new Float64Array(parameters.length ** 2);
  const derive = (f: (p: ArrayLike<number>) => number) => derivedTime(f, parameters, uncertainties);
  return {
    law: law.law,
    formula: law.formula,
    names: law.names,
    units: law.units,
    parameters,
    covariance: uncertainties,
    jacobian,
    prediction: value,
    chi2: fit.chi2,
    degreesOfFreedom,
    pValue: chiSquareUpperTail(fit.chi2, degreesOfFreedom),
    aicc: akaike(fit.chi2, parameters.length, frames),
    converged: problem === null,
    reason: problem ?? fit.reason,
    predict: (delays) => predict(task.lawAt(delays), parameters, delays.length),
    survival: (t) => law.survival(parameters, t),
    lifetime: derive((p) => (law.headline === null ? law.amplitudeAveraged(p) : p[law.headline]!)),
    amplitudeAveraged: derive(law.amplitudeAveraged),
    intensityAveraged: derive(law.intensityAveraged),
  };
}

/** AICc; of as few points as one exponential can be fitted to (3), where it is infinite, the uncorrected form. */
function akaike(chi2: number, k: number, n: number): number {
  return n > k + 1 ? correctedAkaike(chi2, k, n) : chi2 + 2 * k;
}

function minimise(
  { law, start, lower, upper }: LawTask,
  data: LightData,
  value: Float64Array,
  jacobian: readonly Float64Array[],
): LeastSquaresFit {
  // The model and its derivatives come together; the second call at the same place is free.
  let at: Float64Array | null = null;
  const evaluate = (x: Float64Array) => {
    if (at?.every((known, j) => known === x[j])) return;
    const p = fromCoordinates(law, x);
    law.evaluate(p, value, jacobian);
    law.positive.forEach((log, j) => {
      if (log) for (let i = 0; i < value.length; i++) jacobian[j]![i]! *= p[j]!;
    });
    at = x.slice();
  };
  return fitLeastSquares({
    prediction: (x) => {
      evaluate(x);
      return value;
    },
    jacobian: (x) => {
      evaluate(x);
      return jacobian;
    },
    y: data.light,
    sigma: data.sigma,
    start: toCoordinates(law, start),
    lower: toCoordinates(law, lower),
    upper: toCoordinates(law, upper),
    scale: law.names.map((_, j) => (law.positive[j] ? 1 : Math.abs(start[j]!) || 1)),
    maxIterations: MAX_ITERATIONS,
  });
}

const MAX_ITERATIONS = 200;

const toCoordinates = (law: Law, p: readonly number[]): number[] =>
  p.map((value, j) => (law.positive[j] ? Math.log(value) : value));

const fromCoordinates = (law: Law, x: ArrayLike<number>): Float64Array =>
  Float64Array.from(x, (value, j) => (law.positive[j] ? Math.exp(value) : value));

/** (Jᵀ σ⁻² J)⁻¹, row-major; null where the data do not determine every parameter. */
function covarianceOf(jacobian: readonly Float64Array[], sigma: ArrayLike<number>): Float64Array | null {
  const n = jacobian.length;
  const fisher = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    for (let k = 0; k <= j; k++) {
      let sum = 0;
      for (let i = 0; i < sigma.length; i++) sum += (jacobian[j]![i]! * jacobian[k]![i]!) / sigma[i]! ** 2;
      fisher[j * n + k] = sum;
    }
  }
  return invertSymmetric(fisher, n) && fisher.every(Number.isFinite) ? fisher : null;
}

function whyUseless(
  task: LawTask,
  fit: LeastSquaresFit,
  parameters: Float64Array,
  covariance: Float64Array | null,
): string | null {
  if (fit.atBound.length > 0) {
    const j = fit.atBound[0]!;
    const [lower, upper] = [task.lower[j]!, task.upper[j]!];
    const nearer = Math.abs(parameters[j]! - lower) < Math.abs(parameters[j]! - upper) ? "lower" : "upper";
    return task.law.edge(j, nearer);
  }
  if (!fit.converged) return fit.reason;
  if (covariance === null) return "the data do not determine every parameter";
  if (!(parameters[0]! > 0)) return "the amplitude is not positive";
  return task.objection(parameters, covariance);
}

function predict(law: Law, parameters: Float64Array, frames: number): Float64Array {
  const value = new Float64Array(frames);
  law.evaluate(
    parameters,
    value,
    law.names.map(() => new Float64Array(frames)),
  );
  return value;
}

/** A function of the parameters with its gradient (central differences) and u = √(gᵀ C g), JCGM 100 equation (13). */
export function derivedTime(
  f: (p: ArrayLike<number>) => number,
  parameters: Float64Array,
  covariance: Float64Array,
): DerivedTime {
  const n = parameters.length;
  const p = parameters.slice();
  const gradient = parameters.map((centre, j) => {
    const h = 6e-6 * (Math.abs(centre) || 1);
    p[j] = centre + h;
    const above = f(p);
    p[j] = centre - h;
    const below = f(p);
    p[j] = centre;
    return (above - below) / (2 * h);
  });
  let variance = 0;
  for (let j = 0; j < n; j++) {
    for (let k = 0; k < n; k++) variance += gradient[j]! * covariance[j * n + k]! * gradient[k]!;
  }
  return { value: f(parameters), u: Math.sqrt(Math.max(0, variance)), gradient };
}
