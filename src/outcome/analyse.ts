import type { DecayFit } from "../decay/fit.ts";
import { akaikeWeights } from "../numerics/model-choice.ts";
import type { Stack } from "../stack/stack.ts";
import type { LawFit, TransportLaw } from "../transport/laws.ts";
import { version } from "../version.ts";
import type { Analysis, AnalysisOptions, CurvePoint } from "./analysis.ts";
import { lightOfWhole, lightOfWidths } from "./closure-light.ts";
import { densityOf } from "./density.ts";
import { gatherEvidence } from "./evidence.ts";
import { fieldBlock } from "./field-block.ts";
import { fieldQuantities } from "./field-quantities.ts";
import { isAdopted, isMisled, judgeField, repulsionNotTested } from "./field-verdict.ts";
import type { Joint } from "./joint.ts";
import { joinFits, quadratic } from "./joint.ts";
import { type Quantities, quantitiesOf, quantitiesOfField } from "./quantities.ts";
import { readRecording } from "./read-recording.ts";
import type { Reading } from "./reading.ts";
import type { DecayLaw, Law, Result } from "./result.ts";
import { frameRows, spotsOf } from "./rows.ts";
import { tensorOf } from "./tensor.ts";
import { judge } from "./verdict.ts";
import { fitWholeStack, isDipolar, type WholeStack, wholeLightOf } from "./whole-stack.ts";

const DEFAULT_SEED = 1;

/**
 * The main job: from a stack to D, τ, L and μ with their uncertainties, the frames and the verdict.
 *
 * @throws InputFault where the stack cannot be analysed: no spot, too few frames in the window
 */
export function analyse(stack: Stack, options: AnalysisOptions = {}): Analysis {
  return examine(stack, options).analysis;
}

/** An analysis with what its models say of the light. */
export interface Examined {
  readonly analysis: Analysis;
  /** Mean light of every frame by the models that the headline comes from, photons per pixel; made when asked for. */
  readonly meanLight: () => Float64Array[];
}

/** As `analyse`, keeping the fitted models. */
export function examine(stack: Stack, options: AnalysisOptions = {}): Examined {
  const started = new Date();
  const reading = readRecording(stack, options);
  const joint = joinFits(reading);
  const evidence = gatherEvidence(reading);
  const seed = options.seed ?? DEFAULT_SEED;
  const widths = quantitiesOf(reading, joint, seed);
  const plain = judge({ reading, joint, evidence, quantities: widths });
  const { outcome, verdict, field, whole } = withField(reading, joint, widths, plain, options, seed);
  const { acquisition } = stack;
  const window = reading.widths.map((width) => acquisition.time.delays[width.frame]!);
  const { file, sha256, shape, axes } = stack.source;
  const result: Result = {
    schema: "gleamwalk.result/1",
    input: { file, sha256, shape: [...shape], axes },
    acquisition: { ...acquisition.settings },
    verdict,
    quantities: outcome.quantities,
    lengths: outcome.lengths,
    tensor: tensorOf(
      reading.line,
      acquisition,
      joint.spreadBirge,
      outcome.quantities.diffusion_coefficient.value,
    ),
    transport: {
      preferred: reading.preferredLaw,
      window: { from_ns: window[0]!, to_ns: window.at(-1)!, frames: window.length },
      models: spreadLaws(reading),
      exponent: exponentOf(reading),
      runs_p_value: evidence.runsP,
      birge_factor: joint.spreadBirge,
    },
    decay: decayBlock(reading, joint),
    density: densityOf(acquisition, outcome.quantities.mobility),
    field,
    closure: null,
    budget: outcome.budget,
    frames: frameRows(reading),
    provenance: {
      version,
      options: optionsUsed(options),
      started: started.toISOString(),
      seconds: (Date.now() - started.getTime()) / 1000,
    },
  };
  const analysis: Analysis = {
    result,
    stack,
    spots: spotsOf(reading),
    spreadCurve: spreadCurve(reading, joint),
    lightCurve: lightCurve(reading, joint),
    lightResiduals: lightResiduals(reading),
    wholeLight: whole === null ? null : wholeLightOf(whole, stack),
  };
  const adopted = field?.adopted === true ? whole : null;
  return {
    analysis,
    meanLight: () => (adopted === null ? lightOfWidths(reading) : lightOfWhole(reading, adopted)),
  };
}

/** The whole-stack fit where it pays: its block, and what it changes in quantities and verdict. */
function withField(
  reading: Reading,
  joint: Joint,
  widths: Quantities,
  plain: Result["verdict"],
  options: AnalysisOptions,
  seed: number,
): {
  outcome: Quantities;
  verdict: Result["verdict"];
  field: Result["field"];
  whole: WholeStack | null;
} {
  const { field: wish = "auto" } = options;
  const dipolar = isDipolar(reading.stack.acquisition);
  const pays = wish === "always" || (wish === "auto" && (isMisled(plain) || dipolar));
  const whole = pays ? fitWholeStack(reading, joint, options.onCandidate) : null;
  if (whole === null) {
    const verdict = dipolar ? repulsionNotTested(plain, reading.stack.acquisition) : plain;
    return { outcome: widths, verdict, field: null, whole };
  }
  const field = fieldQuantities(whole.data, whole.fits);
  const adopted = isAdopted(plain, whole);
  const { acquisition } = reading.stack;
  return {
    outcome: adopted ? quantitiesOfField(field, acquisition, seed) : widths,
    verdict: judgeField(plain, whole, field, widths),
    field: fieldBlock(whole, field, acquisition, adopted),
    whole,
  };
}

function optionsUsed({ from, to, seed, field }: AnalysisOptions): Record<string, number | string> {
  return {
    field: field ?? "auto",
    seed: seed ?? DEFAULT_SEED,
    ...(from === undefined ? {} : { from_ns: from }),
    ...(to === undefined ? {} : { to_ns: to }),
  };
}

interface AnyLaw {
  readonly formula: string;
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly parameters: ArrayLike<number>;
  readonly covariance: Float64Array;
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  readonly pValue: number;
  readonly aicc: number;
  readonly converged: boolean;
}

function lawRow(fit: AnyLaw, weight: number): Law {
  const n = fit.names.length;
  const uOf = (j: number): number => {
    const u = Math.sqrt(fit.covariance[j * n + j]!);
    return Number.isFinite(u) ? u : Number.MAX_VALUE;
  };
  return {
    formula: fit.formula,
    parameters: Object.fromEntries(
      fit.names.map((name, j) => [name, { value: fit.parameters[j]!, u: uOf(j), unit: fit.units[j]! }]),
    ),
    chi2: fit.chi2,
    degrees_of_freedom: fit.degreesOfFreedom,
    p_value: fit.pValue,
    aicc: Number.isFinite(fit.aicc) ? fit.aicc : Number.MAX_VALUE,
    weight,
    converged: fit.converged,
  };
}

function spreadLaws({ laws }: Reading): Result["transport"]["models"] {
  const names = Object.keys(laws) as TransportLaw[];
  const usable = names.filter((name) => laws[name]?.converged);
  const weights = akaikeWeights(usable.map((name) => laws[name]!.aicc));
  const row = (name: TransportLaw): Law | null => {
    const fit: LawFit | null = laws[name];
    return fit === null ? null : lawRow(fit, weights[usable.indexOf(name)] ?? 0);
  };
  return {
    line: row("line"),
    power_law: row("power_law"),
    arrest: row("arrest"),
    broken_line: row("broken_line"),
  };
}

function exponentOf({ laws }: Reading): Result["transport"]["exponent"] {
  const fit = laws.power_law;
  if (!fit?.converged) return null;
  return { value: fit.parameters[2]!, u: Math.sqrt(fit.covariance[8]!) };
}

function decayBlock({ decays }: Reading, joint: Joint): Result["decay"] {
  const { decay } = joint;
  if (decays === null || decay === null) return null;
  const row = (name: DecayLaw): Law | null => {
    const fit: DecayFit | null = decays.fits[name];
    return fit === null ? null : lawRow(fit, decays.weights[name]);
  };
  const withU = ({ value, gradient }: DecayFit["lifetime"]) => ({
    value,
    u: Math.sqrt(Math.max(quadratic(gradient, joint.decayCovariance), 0)),
  });
  return {
    preferred: decays.preferred,
    models: {
      exponential: row("exponential"),
      two_exponentials: row("two_exponentials"),
      stretched: row("stretched"),
      annihilation: row("annihilation"),
    },
    amplitude_averaged_lifetime_ns: withU(decay.amplitudeAveraged),
    intensity_averaged_lifetime_ns: withU(decay.intensityAveraged),
    birge_factor: joint.decayBirge,
  };
}

const CURVE_POINTS = 120;

function spreadCurve(reading: Reading, joint: Joint): CurvePoint[] {
  const { times, widths, preferredLaw, laws, line } = reading;
  const from = widths[0]!.time;
  const to = widths.at(-1)!.time;
  const shift = times[0]! - reading.stack.acquisition.time.delays[0]!;
  const law = preferredLaw === "line" ? null : laws[preferredLaw];
  const components = line.intercept.length;
  const mean = (c: readonly number[]): number => (components === 3 ? (c[0]! + c[2]!) / 2 : c[0]!);
  const half = components === 3 ? [0.5, 0, 0.5] : [1];
  return Array.from({ length: CURVE_POINTS }, (_, i) => {
    const t = from + ((to - from) * i) / (CURVE_POINTS - 1);
    const gradient = law === null ? [...half, ...half.map((h) => 2 * t * h)] : law.gradient(t);
    return {
      delay: t - shift,
      value: law === null ? mean(line.intercept) + 2 * mean(line.diffusion) * t : law.value(t),
      u: Math.sqrt(Math.max(quadratic(gradient, joint.thetaCovariance), 0)),
    };
  });
}

/** The decay at the frames in the fit, where gate, response, slit and earlier pulses are in it. */
function lightCurve({ light, stack }: Reading, { decay, decayCovariance }: Joint): CurvePoint[] {
  if (decay === null) return [];
  return light.frames.map((frame, k) => {
    const gradient = decay.jacobian.map((column) => column[k]!);
    return {
      delay: stack.acquisition.time.delays[frame]!,
      value: decay.prediction[k]!,
      u: Math.sqrt(Math.max(quadratic(gradient, decayCovariance), 0)),
    };
  });
}

function lightResiduals({ light, decays, stack }: Reading): (number | null)[] {
  const residuals: (number | null)[] = stack.acquisition.time.delays.map(() => null);
  const fit = decays?.fits[decays.preferred] ?? null;
  if (fit === null) return residuals;
  for (const [k, frame] of light.frames.entries()) {
    residuals[frame] = (light.value[frame]! - fit.prediction[k]!) / light.sigma[frame]!;
  }
  return residuals;
}
