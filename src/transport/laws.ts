import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { fitLeastSquares } from "../numerics/least-squares.ts";
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
  starts(guess: Guess): number[][];
  bounds(guess: Guess): { lower: number[]; upper: number[] };
}

interface Guess {
  readonly intercept: number;
  readonly diffusion: number;
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
  starts: ({ intercept, diffusion }) => [[intercept, diffusion]],
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
  starts: ({ intercept, diffusion, last }) =>
    [0.5, 1, 1.7].map((alpha) => [intercept, (diffusion * last) / last ** alpha, alpha]),
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
  starts: ({ intercept, diffusion, last }) =>
    [0.15, 0.5, 2].map((share) => [intercept, diffusion * (1 + 0.5 / share), share * last]),
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
  starts: ({ intercept, diffusion, first, last }) =>
    [0.2, 0.4, 0.65].map((share) => [
      intercept,
      1.5 * diffusion,
      0.5 * diffusion,
      first + share * (last - first),
    ]),
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
  const first = times[0]!;
  const last = times[times.length - 1]!;
  let guess: Guess = { intercept: y[0]!, diffusion: 0, first, last };
  for (const form of FORMS) {
    const fit = fitForm(form, times, y, sigma, guess);
    fits[form.law] = fit;
    if (form.law === "line" && fit !== null) {
      const floor = Math.sqrt(fit.covariance[3]!);
      guess = {
        intercept: fit.parameters[0]!,
        diffusion: Math.max(Math.abs(fit.parameters[1]!), floor),
        first,
        last,
      };
    }
  }
  return fits;
}

function fitForm(
  form: LawForm,
  times: readonly number[],
  y: readonly number[],
  sigma: readonly number[],
  guess: Guess,
): LawFit | null {
  const n = form.names.length;
  if (times.length < n + 2) return null;
  const columns = Array.from({ length: n }, () => new Float64Array(times.length));
  const prediction = new Float64Array(times.length);
  const fits = form.starts(guess).map((start) =>
    fitLeastSquares({
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
      ...form.bounds(guess),
      maxIterations: 200,
    }),
  );
  const best = fits.reduce((a, b) => (b.chi2 < a.chi2 ? b : a));
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
