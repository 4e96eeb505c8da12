import type { Measured } from "./acquisition.ts";
import { KEY_RULES, type KeyRule } from "./acquisition-keys.ts";
import { InputFault } from "./fault.ts";
import { parseQuantity, QuantityFault } from "./quantity.ts";
import { printable, type WrittenSetting, type WrittenSettings } from "./settings.ts";
import { KINDS } from "./units.ts";

type QuantityRule = Extract<KeyRule, { form: "quantity" }>;

/** Far beyond any measurement in µm, ns, K, meV or counts, and far from where products of them overflow. */
const LARGEST = 1e15;
const SMALLEST = 1e-15;

/** A quantity in internal units, or null where the key is not written. */
export function quantityOf(settings: WrittenSettings, key: string): Measured | null {
  const setting = settings.values.get(key);
  const rule = KEY_RULES[key];
  if (setting === undefined || rule?.form !== "quantity") return null;
  const needsUnit = !Object.hasOwn(KINDS[rule.kind].factors, "");
  if (typeof setting.value === "number") {
    if (needsUnit) throw valueFault(settings, key, "has no unit");
    return checked(settings, key, rule, { value: setting.value, u: 0 });
  }
  if (typeof setting.value !== "string") throw valueFault(settings, key, "is a list");
  try {
    return checked(settings, key, rule, parseQuantity(setting.value, rule.kind));
  } catch (error) {
    if (error instanceof QuantityFault) throw valueFault(settings, key, error.message);
    throw error;
  }
}

function checked(settings: WrittenSettings, key: string, rule: QuantityRule, measured: Measured): Measured {
  const { value, u } = measured;
  if (!Number.isFinite(value)) throw valueFault(settings, key, "is not a finite number");
  if (rule.kind === "temperature" && value <= 0) {
    throw valueFault(settings, key, value < 0 ? "lies below 0 K" : "is 0 K");
  }
  const range = rule.range ?? "positive";
  if (range === "positive" && value <= 0) throw valueFault(settings, key, "is not above zero");
  if (range === "not-negative" && value < 0) throw valueFault(settings, key, "is below zero");
  if (range === "at-least-1" && value < 1) throw valueFault(settings, key, "is below 1");
  if (Math.abs(value) > LARGEST) throw valueFault(settings, key, "is too large to be meant");
  if (value !== 0 && Math.abs(value) < SMALLEST) throw valueFault(settings, key, "is too small to be meant");
  if (rule.kind === "fraction" && value > 1) throw valueFault(settings, key, "is above 100 %");
  if (u > Math.abs(value)) throw valueFault(settings, key, "has an uncertainty larger than itself");
  if (u > 0 && rule.uncertain !== true && key !== "time.step") {
    throw valueFault(settings, key, "carries an uncertainty, which is not used there");
  }
  return measured;
}

/** Text, or null where the key is not written; a number is taken as its digits. */
export function textOf(settings: WrittenSettings, key: string): string | null {
  const value = settings.values.get(key)?.value;
  if (value === undefined) return null;
  if (typeof value === "object") throw valueFault(settings, key, "is a list");
  const text = String(value).trim();
  if (text === "") throw valueFault(settings, key, "is empty");
  return text;
}

/** A list of numbers, or null where the key is not written; text may list them with commas. */
export function numbersOf(settings: WrittenSettings, key: string): number[] | null {
  const value = settings.values.get(key)?.value;
  if (value === undefined) return null;
  const list =
    typeof value === "string"
      ? value.replace(/^\s*\[|\]\s*$/g, "").split(",")
      : typeof value === "number"
        ? [value]
        : value;
  return list.map((each, i) => {
    const number = typeof each === "string" && each.trim() === "" ? Number.NaN : Number(each);
    if (!Number.isFinite(number)) {
      throw valueFault(
        settings,
        key,
        `holds ${JSON.stringify(String(each).trim())} in place ${i + 1}, which is not a number`,
      );
    }
    if (Math.abs(number) > LARGEST) {
      throw valueFault(settings, key, `holds ${number} in place ${i + 1}, which is too large to be meant`);
    }
    return number;
  });
}

/** The fault of a value that cannot be used: where it stands, what is wrong, and how it should look. */
export function valueFault(settings: WrittenSettings, key: string, wrong: string): InputFault {
  const setting = settings.values.get(key);
  const file = originName(settings, setting);
  const name = setting?.from === "command line" ? key : key.slice(key.indexOf(".") + 1);
  const mend = `write for example ${name} = ${KEY_RULES[key]?.example ?? '"…"'}`;
  return new InputFault(`${file}: ${key} = ${showValue(setting)} ${wrong}; ${mend}`, { file, where: key });
}

/** How a message calls the place that a setting was written in. */
export function originName(settings: WrittenSettings, setting: WrittenSetting | undefined): string {
  if (setting?.from === "command line") return "command line";
  if (setting?.from === "image metadata") return `${settings.image} (image metadata)`;
  return settings.acquisitionFile ?? settings.image;
}

function showValue(setting: WrittenSetting | undefined): string {
  const value = setting?.value;
  if (typeof value === "string") return JSON.stringify(value);
  if (typeof value === "number") return String(value);
  if (value === undefined) return "nothing";
  return printable(`[${value.slice(0, 4).join(", ")}${value.length > 4 ? ", …" : ""}]`);
}
