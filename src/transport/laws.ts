import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { fitLeastSquares } from "../numerics/least-squares.ts";
import { solveSymmetric } from "../numerics/linear-algebra.ts";
import { correctedAkaike } from "../numerics/model-choice.ts";
import type { Width } from "./width.ts";
import { perAxis, perAxisVariance } from "./width.ts";

export type TransportLaw = "line" | "power_law" | "arrest" | "broken_line";

/** One law of spread fitted to the variance per axis; µm² and ns. */
export interface LawFit {
  readonly law: TransportLaw;
  readonly formula: string;
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly parameters: readonly number[];
  /** Row-major. */
  readonly covariance: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly pValue: number;
  readonly aicc: number;
  readonly converged: boolean;
  /** Variance per axis, µm². */
  value(time: number): number;
  /** Its derivatives by the parameters. */
  gradient(time: number): number[];
}

/** A law of spread: σ²(t) with its derivatives. All have the intercept first. */
interface LawForm {
  readonly law: TransportLaw;
  readonly formula: string;
  readonly names: readonly string[];
  readonly units: readonly string[];
  value(p: ArrayLike<number>, t: number): number;
  gradient(p: ArrayLike<number>, t: number): number[];
  /** Values of the last parameter to scan for a start; the others enter linearly. None: all are linear. */
  scan(range: Range): number[];
  bounds(range: Range): { lower: number[]; upper: number[] };
}

/** First and last time of the window, ns. */
interface Range {
  readonly first: number;
  readonly last: number;
}

const FREE = Number.POSITIVE_INFINITY;

const line: LawForm = {
  law: "line",
  formula: "Σ(t) = Σ₀ + 2Dt",
  names: ["intercept", "D"],
  units: ["µm²", "µm²/ns"],
  value: (p, t) => p[0]! + 2 * p[1]! * t,
  gradient: (_, t) => [1, 2 * t],
  scan: () => [],
  bounds: () => ({ lower: [-FREE, -FREE], upper: [FREE, FREE] }),
};

/** t^α with 0 where t ≤ 0: nothing has moved before the pulse. */
const power = (t: number, alpha: number): number => (t > 0 ? t ** alpha : 0);

/** Sub- (α < 1) or superdiffusion (α > 1): Metzler and Klafter, Phys. Rep. 339 (2000) 1. */
const powerLaw: LawForm = {
  law: "power_law",
  formula: "Σ(t) = Σ₀ + 2Γt^α",
  names: ["intercept", "gamma", "alpha"],
  units: ["µm²", "µm²/ns^α", ""],
  value: (p, t) => p[0]! + 2 * p[1]! * power(t, p[2]!),
  gradient: (p, t) => [1, 2 * power(t, p[2]!), t > 0 ? 2 * p[1]! * power(t, p[2]!) * Math.log(t) : 0],
  scan: () => [0.3, 0.5, 0.7, 0.9, 1.15, 1.4, 1.8, 2.3],
  bounds: () => ({ lower: [-FREE, -FREE, 0.05], upper: [FREE, FREE, 3] }),
};

/** Motion that dies out with time constant t_a, as with irreversible capture: D(t) = D·e^(−t/t_a), integrated. */
const arrest: LawForm = {
  law: "arrest",
  formula: "Σ(t) = Σ₀ + 2Dt_a(1 − exp(−t/t_a))",
  names: ["intercept", "D", "t_a"],
  units: ["µm²", "µm²/ns", "ns"],
  value: (p, t) => p[0]! - 2 * p[1]! * p[2]! * Math.expm1(-Math.max(t, 0) / p[2]!),
  gradient: (p, time) => {
    const t = Math.max(time, 0);
    const x = t / p[2]!;
    return [1, -2 * p[2]! * Math.expm1(-x), 2 * p[1]! * (-Math.expm1(-x) - x * Math.exp(-x))];
  },
  scan: ({ last }) => [0.05, 0.1, 0.2, 0.35, 0.6, 1, 2, 5].map((share) => share * last),
  // beyond these the arrest is a step at once or a line
  bounds: ({ last }) => ({ lower: [-FREE, -FREE, 0.02 * last], upper: [FREE, FREE, 20 * last] }),
};

/** Two straight pieces that meet at t_b: D before, D_late after. */
const brokenLine: LawForm = {
  law: "broken_line",
  formula: "Σ(t) = Σ₀ + 2Dt before t_b, then slope 2D_late",
  names: ["intercept", "D", "D_late", "t_b"],
  units: ["µm²", "µm²/ns", "µm²/ns", "ns"],
  value: (p, t) => p[0]! + 2 * p[1]! * Math.min(t, p[3]!) + 2 * p[2]! * Math.max(t - p[3]!, 0),
  gradient: (p, t) => [
    1,
    2 * Math.min(t, p[3]!),
    2 * Math.max(t - p[3]!, 0),
    t > p[3]! ? 2 * (p[1]! - p[2]!) : 0,
  ],
  scan: ({ first, last }) =>
    [0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8].map((share) => first + share * (last - first)),
  bounds: ({ first, last }) => ({
    lower: [-FREE, -FREE, -FREE, first + 0.05 * (last - first)],
    upper: [FREE, FREE, FREE, last - 0.05 * (last - first)],
  }),
};

const FORMS = [line, powerLaw, arrest, brokenLine] as const;

/**
 * Fits the four laws of spread to the variance per axis, each by weighted least squares with fixed weights.
 *
 * @param widths the frames in the window, in order of time
 */
export function fitLaws(widths: readonly Width[]): Record<TransportLaw, LawFit | null> {
  const fits: Record<TransportLaw, LawFit | null> = {
    line: null,
    power_law: null,
    arrest: null,
    broken_line: null,
  };
  const times = widths.map((width) => width.time);
  const y = widths.map(perAxis);
  const sigma = widths.map((width) => Math.sqrt(perAxisVariance(width)));
  const range = { first: times[0]!, last: times.at(-1)! };
  for (const form of FORMS) fits[form.law] = fitForm(form, times, y, sigma, range);
  return fits;
}

function fitForm(
  form: LawForm,
  times: readonly number[],
  y: readonly number[],
  sigma: readonly number[],
  range: Range,
): LawFit | null {
  const n = form.names.length;
  if (times.length < n + 2) return null;
  const columns = Array.from({ length: n }, () => new Float64Array(times.length));
  const prediction = new Float64Array(times.length);
  const start = bestStart(form, times, y, sigma, range);
  if (start === null) return null;
  const best = fitLeastSquares({
    prediction: (p) => {
      for (let i = 0; i < times.length; i++) prediction[i] = form.value(p, times[i]!);
      return prediction;
    },
    jacobian: (p) => {
      for (let i = 0; i < times.length; i++) {
        const row = form.gradient(p, times[i]!);
        for (let j = 0; j < n; j++) columns[j]![i] = row[j]!;
      }
      return columns;
    },
    y,
    sigma,
    start,
    ...form.bounds(range),
    maxIterations: 200,
  });
  const { parameters, covariance, chi2 } = best;
  return {
    law: form.law,
    formula: form.formula,
    names: form.names,
    units: form.units,
    parameters,
    covariance,
    chi2,
    degreesOfFreedom: times.length - n,
    pValue: chiSquareUpperTail(chi2, times.length - n),
    aicc: correctedAkaike(chi2, n, times.length),
    converged: best.converged && best.atBound.length === 0,
    value: (t) => form.value(parameters, t),
    gradient: (t) => form.gradient(parameters, t),
  };
}

/** Points of a long series that the scan looks at; the fit itself takes all. */
const SCANNED = 60;

/** The best of the scanned shapes, with the linear parameters solved for each (variable projection). */
function bestStart(
  form: LawForm,
  times: readonly number[],
  y: readonly number[],
  sigma: readonly number[],
  range: Range,
): number[] | null {
  const shapes = form.scan(range);
  if (shapes.length === 0) return solveLinear(form, [], times, y, sigma)?.parameters ?? null;
  let best: { parameters: number[]; chi2: number } | null = null;
  for (const shape of shapes) {
    const trial = solveLinear(form, [shape], times, y, sigma);
    if (trial !== null && (best === null || trial.chi2 < best.chi2)) best = trial;
  }
  return best?.parameters ?? null;
}

function solveLinear(
  form: LawForm,
  shape: readonly number[],
  times: readonly number[],
  y: readonly number[],
  sigma: readonly number[],
): { parameters: number[]; chi2: number } | null {
  const m = form.names.length - shape.length;
  const normal = new Float64Array(m * m);
  const solution = new Float64Array(m);
  const zero = [...new Array<number>(m).fill(0), ...shape];
  const stride = Math.ceil(times.length / SCANNED);
  for (let i = 0; i < times.length; i += stride) {
    const basis = form.gradient(zero, times[i]!);
    const w = 1 / sigma[i]! ** 2;
    for (let a = 0; a < m; a++) {
      solution[a]! += w * basis[a]! * y[i]!;
      for (let b = 0; b <= a; b++) normal[a * m + b]! += w * basis[a]! * basis[b]!;
    }
  }
  if (!solveSymmetric(normal, m, solution)) return null;
  const parameters = [...solution, ...shape];
  let chi2 = 0;
  for (let i = 0; i < times.length; i += stride) {
    chi2 += ((y[i]! - form.value(parameters, times[i]!)) / sigma[i]!) ** 2;
  }
  return { parameters, chi2 };
}

/** How much better, in corrected Akaike units, another law must be before the line is given up. */
const CLEARLY_BETTER = 10;

/**
 * The law to report: the line, unless another converged law lies more than 10 corrected Akaike units below it, where
 * the line has "essentially no support" (Burnham and Anderson, Model Selection and Multimodel Inference, 2nd ed.,
 * 2002, section 2.6). Anything weaker would trade the line for a law with a needless parameter on a few per cent of
 * plain recordings, and their intervals would no longer hold.
 */
export function preferLaw(fits: Record<TransportLaw, LawFit | null>): TransportLaw {
  const { line } = fits;
  let best: LawFit | null = null;
  for (const fit of Object.values(fits)) {
    if (fit === null || fit === line || !fit.converged) continue;
    if (best === null || fit.aicc < best.aicc) best = fit;
  }
  if (best === null) return "line";
  return line === null || best.aicc < line.aicc - CLEARLY_BETTER ? best.law : "line";
}
