import { readScenario } from "../../src/field/scenario.ts";
import { drawFrames, expectation } from "../../src/field/synthesise.ts";
import type { Truth } from "../../src/field/truth.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { analyse } from "../../src/outcome/analyse.ts";
import type { Analysis, AnalysisOptions } from "../../src/outcome/analysis.ts";
import { type Result, resultSchema } from "../../src/outcome/result.ts";
import type { Acquisition } from "../../src/stack/acquisition.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import type { Stack } from "../../src/stack/stack.ts";

/** Keys of a scenario by section; a value of null takes the key out. */
export type Keys = Record<string, Record<string, string | number | boolean | null>>;

const PLAIN: Keys = {
  recording: { frames: 30, width: 48, height: 48, photons: 3e4, background: 0.3, seed: 1 },
  space: { pixel: "0.1 um" },
  time: { first: "0 ns", step: "0.3 ns" },
  motion: {
    diffusion_coefficient: "0.2 cm^2/s",
    sigma0: "0.35 um",
    centre_x: "2.37 um",
    centre_y: "2.33 um",
  },
  life: { lifetime: "5 ns" },
  sample: { name: "Alder", temperature: "300 K" },
};

export interface Recorded {
  readonly stack: Stack;
  readonly truth: Truth;
}

function toToml(keys: Keys): string {
  const value = (v: string | number | boolean): string => (typeof v === "string" ? `"${v}"` : String(v));
  return Object.entries(keys)
    .map(([section, entries]) =>
      [
        `[${section}]`,
        ...Object.entries(entries).flatMap(([k, v]) => (v === null ? [] : [`${k} = ${value(v)}`])),
      ].join("\n"),
    )
    .join("\n");
}

/** A synthetic recording: a round spot of 3·10⁴ photons, D = 0.2 cm²/s, τ = 5 ns, with the given keys changed. */
export function recorded(
  changes: Keys = {},
  seed = 1,
  edit: (a: Acquisition) => Acquisition = (a) => a,
): Recorded {
  const keys: Keys = { ...PLAIN };
  for (const [section, entries] of Object.entries(changes)) keys[section] = { ...keys[section], ...entries };
  const scenario = readScenario(toToml(keys), "scenario.toml");
  const mean = expectation(scenario);
  const frames = drawFrames(scenario, mean, createRandom(seed));
  const { rows: height, columns: width } = scenario.recording;
  const acquisition = edit(scenario.acquisition);
  return { stack: memoryStack({ frames, height, width, acquisition }), truth: mean.truth };
}

/** Analyses, and holds the result to its schema, to JSON (no NaN, no Infinity) and to itself. */
export function analysed(stack: Stack, options: AnalysisOptions = {}): Analysis {
  const analysis = analyse(stack, options);
  resultSchema.parse(analysis.result);
  const broken = brokenNumbers(analysis.result);
  if (broken.length > 0) throw new Error(`not fit to print: ${broken.join(", ")}`);
  for (const point of [...analysis.spreadCurve, ...analysis.lightCurve]) {
    if (![point.delay, point.value, point.u].every(Number.isFinite)) throw new Error("a curve is not finite");
  }
  return analysis;
}

export function resultOf(stack: Stack, options: AnalysisOptions = {}): Result {
  return analysed(stack, options).result;
}

function brokenNumbers(value: unknown, path = "result"): string[] {
  if (typeof value === "number") return Number.isFinite(value) ? [] : [path];
  if (typeof value === "string")
    return /NaN|Infinity|undefined|\de\+\d/.test(value) ? [`${path}: ${value}`] : [];
  if (value === null || typeof value !== "object") return [];
  return Object.entries(value).flatMap(([key, inner]) => brokenNumbers(inner, `${path}.${key}`));
}

export const codesOf = (result: Result): string[] => result.verdict.reasons.map((reason) => reason.code);

/** (value − truth)/u. */
export const pull = ({ value, u }: { value: number; u: number }, truth: number): number =>
  (value - truth) / u;
