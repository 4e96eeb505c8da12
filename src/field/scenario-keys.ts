import { KEY_RULES } from "../stack/acquisition-keys.ts";
import { InputFault } from "../stack/fault.ts";
import { nearest } from "../stack/nearest.ts";
import { readQuantity } from "../stack/quantity.ts";
import type { SettingText } from "../stack/settings.ts";
import { KINDS, plainUnit } from "../stack/units.ts";

/** Units by what is measured, with the factor to internal units (µm, ns, rad). */
const UNITS = {
  length: KINDS.length.factors,
  time: KINDS.time.factors,
  rate: {
    "/ns": 1,
    "ns^-1": 1,
    "/ps": 1e3,
    "ps^-1": 1e3,
    "/us": 1e-3,
    "us^-1": 1e-3,
    "/s": 1e-9,
    "s^-1": 1e-9,
  },
  diffusion: { "cm^2/s": 0.1, "um^2/ns": 1, "um^2/us": 1e-3, "nm^2/ps": 1e-3, "m^2/s": 1e3 },
  speed: { "um/ns": 1, "nm/ns": 1e-3, "um/us": 1e-3, "um/s": 1e-9 },
  angle: { deg: Math.PI / 180, "°": Math.PI / 180, rad: 1 },
  number: { "": 1 },
} satisfies Record<string, Readonly<Record<string, number>>>;

interface Rule {
  readonly kind: keyof typeof UNITS;
  readonly example: string;
  readonly least: "above-zero" | "zero" | "any";
  readonly whole?: true;
}

/** The keys that say what is true; all others are those of the acquisition file. */
export const SCENARIO_RULES = {
  "recording.frames": { kind: "number", example: "40", least: "above-zero", whole: true },
  "recording.width": { kind: "number", example: "64", least: "above-zero", whole: true },
  "recording.height": { kind: "number", example: "64", least: "above-zero", whole: true },
  "recording.photons": { kind: "number", example: "1e5", least: "above-zero" },
  "recording.background": { kind: "number", example: "0.2", least: "zero" },
  "recording.seed": { kind: "number", example: "1", least: "any", whole: true },
  "motion.diffusion_coefficient": { kind: "diffusion", example: '"0.5 cm^2/s"', least: "zero" },
  "motion.major": { kind: "diffusion", example: '"0.6 cm^2/s"', least: "zero" },
  "motion.minor": { kind: "diffusion", example: '"0.3 cm^2/s"', least: "zero" },
  "motion.angle": { kind: "angle", example: '"30 deg"', least: "any" },
  "motion.repulsion": { kind: "number", example: "1", least: "zero" },
  "motion.sigma0": { kind: "length", example: '"0.35 um"', least: "above-zero" },
  "motion.fwhm": { kind: "length", example: '"0.82 um"', least: "above-zero" },
  "motion.sigma0_minor": { kind: "length", example: '"0.30 um"', least: "above-zero" },
  "motion.sigma0_angle": { kind: "angle", example: '"30 deg"', least: "any" },
  "motion.centre_x": { kind: "length", example: '"3.2 um"', least: "any" },
  "motion.centre_y": { kind: "length", example: '"3.2 um"', least: "any" },
  "motion.drift_x": { kind: "speed", example: '"1 nm/ns"', least: "any" },
  "motion.drift_y": { kind: "speed", example: '"1 nm/ns"', least: "any" },
  "life.lifetime": { kind: "time", example: '"6 ns"', least: "above-zero" },
  "life.annihilation": { kind: "rate", example: '"0.5 /ns"', least: "zero" },
  "life.capture": { kind: "rate", example: '"0.1 /ns"', least: "zero" },
  "life.trap_light": { kind: "number", example: "1", least: "zero" },
  "life.trap_lifetime": { kind: "time", example: '"20 ns"', least: "above-zero" },
} satisfies Record<string, Rule>;

export type ScenarioKey = keyof typeof SCENARIO_RULES;

/** Acquisition keys that a scenario cannot honour, with the reason. */
const REFUSED: Readonly<Record<string, string>> = {
  axes: "follows from recording.height (none: a trace); take it out",
  "detector.dark": "cannot be simulated; give the offset instead",
  "instrument.response": "cannot be simulated; give instrument.fwhm instead",
  "sample.emission_order": "cannot be simulated; take it out",
};

export function isScenarioKey(key: string): key is ScenarioKey {
  return Object.hasOwn(SCENARIO_RULES, key);
}

/** @throws InputFault for a key that neither a scenario nor an acquisition file has, or that cannot be simulated */
export function checkScenarioKey(file: string, key: string): void {
  const refusal = REFUSED[key];
  if (refusal) throw new InputFault(`${file}: ${key} ${refusal}`, { file, where: key });
  if (isScenarioKey(key) || Object.hasOwn(KEY_RULES, key) || /^conditions\.[^.]/.test(key)) return;
  const known = [...Object.keys(SCENARIO_RULES), ...Object.keys(KEY_RULES).filter((each) => !REFUSED[each])];
  const lastWord = (each: string) => each.slice(each.indexOf(".") + 1);
  const meant = nearest(key, known) ?? known.find((each) => lastWord(each) === lastWord(key)) ?? null;
  throw new InputFault(
    `${file}: ${key} is not a known key; ${meant === null ? "take it out" : `did you mean ${meant}?`}`,
    { file, where: key },
  );
}

/** Reads scenario keys in internal units. */
export class ScenarioValues {
  readonly file: string;
  readonly #settings: Readonly<Record<string, SettingText>>;

  constructor(file: string, settings: Readonly<Record<string, SettingText>>) {
    this.file = file;
    this.#settings = settings;
  }

  has(key: ScenarioKey): boolean {
    return this.#settings[key] !== undefined;
  }

  /** @throws InputFault where the key is missing or its value cannot be used */
  need(key: ScenarioKey): number {
    const value = this.get(key);
    if (value !== null) return value;
    const [section, name] = key.split(".");
    throw new InputFault(
      `${this.file} has no ${key}; add ${name} = ${SCENARIO_RULES[key].example} under [${section}]`,
      { file: this.file, where: key },
    );
  }

  /** Null where the key is absent. */
  get(key: ScenarioKey): number | null {
    const written = this.#settings[key];
    if (written === undefined) return null;
    const rule: Rule = SCENARIO_RULES[key];
    const value = this.#inInternalUnits(key, written, UNITS[rule.kind]);
    if (!Number.isFinite(value)) throw this.fault(key, "is not a finite number");
    if (rule.least === "above-zero" && value <= 0) throw this.fault(key, "is not above zero");
    if (rule.least === "zero" && value < 0) throw this.fault(key, "is below zero");
    if (rule.whole === true && !Number.isSafeInteger(value)) throw this.fault(key, "is not a whole number");
    return value;
  }

  /** The fault of a value that cannot be used. */
  fault(key: ScenarioKey, wrong: string): InputFault {
    const written = this.#settings[key];
    const shown = typeof written === "string" ? `"${written}"` : String(written);
    const example = `${key.split(".")[1]} = ${SCENARIO_RULES[key].example}`;
    return new InputFault(`${this.file}: ${key} = ${shown} ${wrong}; write for example ${example}`, {
      file: this.file,
      where: key,
    });
  }

  #inInternalUnits(
    key: ScenarioKey,
    written: SettingText,
    factors: Readonly<Record<string, number>>,
  ): number {
    const plain = Object.hasOwn(factors, "");
    const known = Object.keys(factors).filter((unit) => unit !== "");
    if (typeof written === "number") {
      if (plain) return written;
      throw this.fault(key, `has no unit (${known.join(", ")})`);
    }
    const quantity = typeof written === "string" ? readQuantity(written) : null;
    if (quantity === null) throw this.fault(key, `is not a number${plain ? "" : " with a unit"}`);
    if (quantity.u !== null) throw this.fault(key, "carries an uncertainty, which a truth has not");
    const unit = plainUnit(quantity.unit);
    if (Object.hasOwn(factors, unit)) return quantity.value * factors[unit]!;
    if (plain) throw this.fault(key, `has the unit ${unit} where a plain number is needed`);
    throw this.fault(
      key,
      unit === "" ? `has no unit (${known.join(", ")})` : `has the unit ${unit} (known: ${known.join(", ")})`,
    );
  }
}
