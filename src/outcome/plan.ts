import { acquisitionToml } from "../field/acquisition-toml.ts";
import { readScenario, type Scenario } from "../field/scenario.ts";
import { readAcquisitionText } from "../stack/acquisition-file.ts";
import { InputFault } from "../stack/fault.ts";
import type { SettingText } from "../stack/settings.ts";
import { type Result, resultSchema } from "./result.ts";

/** What a plan changes about the recording it starts from, as written on the command line. */
export interface PlanChanges {
  readonly photons?: string;
  readonly frames?: string;
  readonly first?: string;
  readonly step?: string;
  readonly sigma0?: string;
}

type Settings = Record<string, SettingText>;

/** Least share of the measured intercept that is left for the excitation spot. */
const LEAST_SPOT = 0.2;
/** Settings that a result repeats and a scenario says in its own way, or cannot honour. */
const NOT_REPEATED = ["axes", "detector.dark", "instrument.response", "sample.emission_order"];

/** @throws InputFault where the scenario or a change cannot be used */
export function planFromScenario(text: string, file: string, changes: PlanChanges): Scenario {
  return planOf(readAcquisitionText(text, file), file, changes);
}

/**
 * The plan that repeats a pilot recording: its settings, light, background and size, with what its result says of D, τ,
 * spot, repulsion, annihilation and traps taken as true.
 *
 * @param text result.json of `spread`
 * @throws InputFault where it is no such result, or one without D or lifetime
 */
export function planFromResult(text: string, file: string, changes: PlanChanges): Scenario {
  const result = parse(text, file);
  const settings = settingsOf(result, file);
  const plan = (variance: number): Settings => ({
    ...settings,
    "motion.sigma0": `${Math.sqrt(variance)} um`,
  });
  const own = spotOfField(result);
  if (own !== null) return planOf(plan(own), file, changes);
  const measured = interceptOf(result, file);
  // blur and pixel are known only once the settings are read
  const { recording } = planOf(plan(measured), file, {});
  const spare = recording.psfVariance + recording.pixelX ** 2 / 12;
  return planOf(plan(Math.max(measured - spare, LEAST_SPOT * measured)), file, changes);
}

function parse(text: string, file: string): Result {
  let json: unknown;
  try {
    json = JSON.parse(text);
  } catch (error) {
    throw notAResult(file, "is not valid JSON", error);
  }
  const read = resultSchema.safeParse(json);
  if (read.success) return read.data;
  throw notAResult(
    file,
    `is not a result of gleamwalk spread (at ${read.error.issues[0]!.path.join(".") || "its top"})`,
  );
}

function notAResult(file: string, wrong: string, cause?: unknown): InputFault {
  return new InputFault(`${file} ${wrong}; give the result.json that gleamwalk spread wrote, or a scenario`, {
    file,
    where: "",
    ...(cause === undefined ? {} : { cause }),
  });
}

function settingsOf(result: Result, file: string): Settings {
  const { quantities, frames, input } = result;
  const field = result.field?.adopted ? result.field : null;
  const { from } = quantities.diffusion_coefficient;
  if (from !== "line" && from !== "field") {
    throw new InputFault(
      `${file}: the pilot's spot does not spread along a straight line and no whole-stack fit describes it; analyse it with gleamwalk spread --field, or write a scenario`,
      { file, where: "quantities.diffusion_coefficient" },
    );
  }
  const d = field?.D.value ?? quantities.diffusion_coefficient.value;
  const tau = field?.tau.value ?? quantities.lifetime?.value;
  if (tau === undefined) {
    throw new InputFault(
      `${file} holds no lifetime to plan with; write a scenario instead, as for gleamwalk synth`,
      { file, where: "quantities.lifetime" },
    );
  }
  const first = frames.find(({ delay_ns, photons }) => delay_ns >= 0 && (photons ?? 0) > 0);
  if (first === undefined) {
    throw new InputFault(`${file} holds no light after the pulse; record a brighter pilot`, {
      file,
      where: "frames",
    });
  }
  const levels = frames.flatMap(({ background }) => (background === null ? [] : [Math.max(background, 0)]));
  const written = Object.entries(result.acquisition).filter(
    ([key, { from }]) => from !== "default" && !NOT_REPEATED.includes(key),
  );
  const [count, height, width] = sizeOf(input, frames.length);
  const settings: Settings = {
    ...Object.fromEntries(written.map(([key, { text }]) => [key, text])),
    "recording.frames": count,
    "recording.width": width,
    "recording.photons": first.photons!,
    "recording.background": levels.sort((a, b) => a - b)[levels.length >> 1] ?? 0,
    "motion.diffusion_coefficient": `${Math.max(d, 0)} cm^2/s`,
    "life.lifetime": `${tau} ns`,
  };
  if (height > 1) settings["recording.height"] = height;
  if (settings["time.first"] === undefined && settings["time.step"] === undefined) {
    settings["time.delays"] = frames.map((frame) => frame.delay_ns);
    settings["time.unit"] = "ns";
  }
  if (field?.k_n0 && field.k_n0.value > 0) settings["life.annihilation"] = `${field.k_n0.value} /ns`;
  if (field?.repulsion && field.repulsion.value > 0) settings["motion.repulsion"] = field.repulsion.value;
  if (field?.capture && field.trap_lifetime && field.capture.value > 0) {
    settings["life.capture"] = `${field.capture.value} /ns`;
    settings["life.trap_lifetime"] = `${field.trap_lifetime.value} ns`;
  }
  return settings;
}

/** Frames, height (1 for a trace) and width. */
function sizeOf({ shape, axes }: Result["input"], frames: number): [number, number, number] {
  const along = (axis: string): number => shape[axes.indexOf(axis)] ?? 1;
  return [frames, axes.includes("Y") ? along("Y") : 1, along("X")];
}

/** Σ₀ per axis of the excitation spot itself, µm², where the whole-stack fit is adopted and has it. */
function spotOfField({ field }: Result): number | null {
  if (field?.adopted !== true) return null;
  const found = field.candidates.find(({ name }) => name === field.preferred)?.parameters;
  const value = found?.s?.value ?? null;
  if (value !== null || !found?.s_xx || !found.s_yy) return value;
  return (found.s_xx.value + found.s_yy.value) / 2;
}

/** Σ₀ per axis of the line through the widths, with blur and pixel in it, µm². */
function interceptOf({ transport }: Result, file: string): number {
  const value = transport.models.line?.parameters.intercept?.value;
  if (value !== undefined && value > 0) return value;
  throw new InputFault(
    `${file} holds no width of the spot at the pulse; write a scenario instead, as for gleamwalk synth`,
    { file, where: "transport.models.line" },
  );
}

function planOf(settings: Settings, file: string, changes: PlanChanges): Scenario {
  const changed: Settings = { ...settings };
  countInto(changed, "recording.photons", changes.photons, "--photons");
  countInto(changed, "recording.frames", changes.frames, "--frames");
  const { first, step, sigma0 } = changes;
  if ("time.delays" in changed && [first, step, changes.frames].some((each) => each !== undefined)) {
    spaceEvenly(changed);
  }
  if (first !== undefined) changed["time.first"] = withUnit(first, "ns");
  if (step !== undefined) changed["time.step"] = withUnit(step, "ns");
  if (sigma0 !== undefined) {
    delete changed["motion.fwhm"];
    changed["motion.sigma0"] = withUnit(sigma0, "um");
  }
  return readScenario(acquisitionToml(changed), file);
}

function countInto(settings: Settings, key: string, text: string | undefined, option: string): void {
  if (text === undefined) return;
  const number = text.trim() === "" ? Number.NaN : Number(text);
  const whole = key === "recording.frames";
  if (!Number.isFinite(number) || number <= 0 || (whole && !Number.isSafeInteger(number))) {
    throw new InputFault(
      `${option} "${text}" is not a ${whole ? "whole " : ""}number above zero; write one such as ${option} ${whole ? "60" : "1e5"}`,
      { where: option },
    );
  }
  settings[key] = number;
}

/** Puts first and mean step in the place of a list of delays, which no longer fits. */
function spaceEvenly(settings: Settings): void {
  const listed = settings["time.delays"];
  const unit = String(settings["time.unit"] ?? "ns");
  const delays = (Array.isArray(listed) ? listed : String(listed).replace(/[[\]]/g, "").split(",")).map(
    Number,
  );
  delete settings["time.delays"];
  delete settings["time.unit"];
  settings["time.first"] = `${delays[0]} ${unit}`;
  settings["time.step"] = `${(delays.at(-1)! - delays[0]!) / (delays.length - 1)} ${unit}`;
}

/** A bare number is taken in the given unit. */
function withUnit(text: string, unit: string): string {
  return /^[-+\d.eE]+$/.test(text.trim()) ? `${text.trim()} ${unit}` : text;
}
