import { record } from "../field/detector.ts";
import { createRandom } from "../numerics/random.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import { InputFault } from "../stack/fault.ts";
import { memoryStack } from "../stack/memory-stack.ts";
import type { Stack } from "../stack/stack.ts";
import { analyse, type Examined } from "./analyse.ts";
import type { AnalysisOptions } from "./analysis.ts";
import type { Quantity, Result } from "./result.ts";

const NAMES = ["diffusion_coefficient", "lifetime", "diffusion_length"] as const;
type Name = (typeof NAMES)[number];
export type Closure = NonNullable<Result["closure"]>;
type Summary = NonNullable<Closure["quantities"][Name]>;

/** All that is needed to draw stacks from a fitted model and to analyse them; plain data, fit for a thread. */
export interface ClosurePlan {
  readonly kind: Stack["kind"];
  readonly height: number;
  readonly width: number;
  readonly dark: Float64Array | null;
  /** With calibrations taken as exact: the drawn stacks test the counting statistics alone. */
  readonly acquisition: Acquisition;
  /** Mean light of every frame, photons per pixel. */
  readonly light: readonly Float64Array[];
  readonly truth: Readonly<Record<Name, number | null>>;
  readonly options: AnalysisOptions;
  readonly seed: number;
}

/** What one drawn stack gave; null for a quantity that it does not give. */
export type ClosureDraw = Readonly<
  Record<Name, Pick<Quantity, "value" | "u" | "interval95" | "upper_limit"> | null>
>;

const DEFAULT_SEED = 1;
/** Drawn frames are stored as a 16-bit camera's. */
const FULL = 65535;

/**
 * The plan of a parametric bootstrap (Efron and Tibshirani, An Introduction to the Bootstrap, 1993, section 6.5): stacks
 * drawn from the fitted model, each analysed as the recording was, with the fit's own answer as the truth.
 *
 * @throws InputFault where the counts lie beyond 16 bits
 */
export function closurePlan({ analysis, meanLight }: Examined, options: AnalysisOptions = {}): ClosurePlan {
  const { stack, result } = analysis;
  const { kind, height, width, dark } = stack;
  const { onProgress: _, onCandidate: __, ...plain } = options;
  const light = meanLight();
  const acquisition = exact(stack.acquisition);
  const { gain, offset, saturation } = acquisition.detector;
  let most = 0;
  for (const frame of light) for (const value of frame) most = Math.max(most, value);
  if (saturation === null && offset + gain * most > FULL) {
    throw new InputFault(
      `${stack.source.file}: the model's brightest pixel holds ${Math.round(offset + gain * most)} counts, more than the 16 bits that --closure draws in; check detector.gain, or leave out --closure.`,
      { file: stack.source.file, where: "--closure" },
    );
  }
  const truth = truthOf(result);
  return {
    kind,
    height,
    width,
    dark,
    acquisition,
    light,
    truth,
    options: plain,
    seed: plain.seed ?? DEFAULT_SEED,
  };
}

function exact(acquisition: Acquisition): Acquisition {
  const { space, time } = acquisition;
  return {
    ...acquisition,
    space: { ...space, pixel: { ...space.pixel, u: 0 } },
    time: { ...time, relativeU: 0 },
  };
}

/** Where L is only limited from above, the model's own L follows from D and the mean lifetime, L² = Dτ. */
function truthOf({ quantities, decay }: Result): ClosurePlan["truth"] {
  const { diffusion_coefficient: d, lifetime, diffusion_length: length } = quantities;
  const mean = decay?.amplitude_averaged_lifetime_ns.value ?? null;
  // 1 µm²/ns is 10 cm²/s
  const limited = d.from === "line" && mean !== null ? Math.sqrt(Math.max((d.value / 10) * mean, 0)) : null;
  return {
    diffusion_coefficient: d.upper_limit === true ? null : d.value,
    lifetime: lifetime?.value ?? null,
    diffusion_length: length?.upper_limit === true ? limited : (length?.value ?? null),
  };
}

/** Stack `index` of a plan; the same for the same seed, whatever else is drawn. */
export function drawStack(plan: ClosurePlan, index: number): Stack {
  const { kind, height, width, dark, acquisition, light } = plan;
  const random = createRandom(plan.seed).spawn(index);
  const { detector } = acquisition;
  const level = dark === null ? detector.offset : Math.round(mean(dark));
  const frames = light.map((expected) => {
    // a fitted background may lie a little below nothing: light cannot, but the camera's offset can
    const lowest = expected.reduce((least, value) => Math.min(least, value), 0);
    const offset = level + detector.gain * lowest;
    const counts = record(
      expected.map((value) => value - lowest),
      { ...detector, offset },
      random,
    );
    return dark === null ? counts : Float64Array.from(counts, (value, i) => value + dark[i]! - level);
  });
  return memoryStack({ kind, frames, height, width, acquisition, ...(dark === null ? {} : { dark }) });
}

function mean(values: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i]!;
  return sum / values.length;
}

/** Draws stack `index` and analyses it; null where the analysis refuses it. */
export function drawClosure(plan: ClosurePlan, index: number): ClosureDraw | null {
  try {
    const { quantities } = analyse(drawStack(plan, index), plan.options).result;
    return Object.fromEntries(NAMES.map((name) => [name, quantities[name]])) as unknown as ClosureDraw;
  } catch (error) {
    if (error instanceof InputFault) return null;
    throw error;
  }
}

/**
 * Bias and coverage of the drawn stacks.
 *
 * Pull: (estimate − truth)/u. Its mean has the counting error s/√n, the share of covering intervals √(p(1 − p)/n) at the
 * nominal p = 0.95. An upper limit covers where it is not below the truth, and has no pull.
 */
export function summariseClosure(
  plan: ClosurePlan,
  draws: readonly (ClosureDraw | null)[],
  asked: number,
): Closure {
  const done = draws.filter((draw) => draw !== null);
  const summary = (name: Name): Summary | null => {
    const truth = plan.truth[name];
    const found = done.flatMap((draw) => draw[name] ?? []);
    return truth === null || found.length === 0 ? null : summarise(truth, found);
  };
  return {
    stacks: draws.length,
    asked,
    failed: draws.length - done.length,
    seed: plan.seed,
    quantities: {
      diffusion_coefficient: summary("diffusion_coefficient"),
      lifetime: summary("lifetime"),
      diffusion_length: summary("diffusion_length"),
    },
  };
}

/** The intervals' stated coverage. */
const NOMINAL = 0.95;

function summarise(truth: number, found: readonly NonNullable<ClosureDraw[Name]>[]): Summary {
  const limits = found.filter((each) => each.upper_limit === true);
  const estimates = found.filter((each) => each.upper_limit !== true && each.u > 0);
  const pulls = estimates.map(({ value, u }) => (value - truth) / u);
  const n = pulls.length;
  const centre = n === 0 ? null : mean(pulls);
  const spread =
    n < 2 ? null : Math.sqrt(pulls.reduce((sum, pull) => sum + (pull - centre!) ** 2, 0) / (n - 1));
  const covering = found.filter(({ value, interval95: [low, high], upper_limit }) =>
    upper_limit === true ? truth <= value : low <= truth && truth <= high,
  );
  return {
    truth,
    bias: n === 0 ? null : mean(estimates.map(({ value }) => value - truth)),
    mean_pull: centre,
    u_mean_pull: spread === null ? null : spread / Math.sqrt(n),
    spread,
    coverage: covering.length / found.length,
    u_coverage: Math.sqrt((NOMINAL * (1 - NOMINAL)) / found.length),
    given: found.length,
    upper_limits: limits.length,
  };
}
