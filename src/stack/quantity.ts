import type { Measured } from "./acquisition.ts";
import { KINDS, plainUnit, type UnitKind, ZERO_CELSIUS_IN_KELVIN } from "./units.ts";

/** A quantity as written: number, standard uncertainty in the same unit or relative, unit text. */
export interface WrittenQuantity {
  readonly value: number;
  /** In the unit of the value; null where none is stated. */
  readonly u: number | null;
  /** As written, "" where there is none. */
  readonly unit: string;
  /** Unit of an uncertainty after ±, where it has its own; "%" for a relative one. */
  readonly uncertaintyUnit: string | null;
}

/** What is wrong with a quantity, as the end of a sentence, with no file or key in it yet. */
export class QuantityFault extends Error {
  override readonly name = "QuantityFault";
}

const NUMBER = String.raw`[-+−]?(?:\d+(?:\.\d*)?|\.\d+)`;
const EXPONENT = String.raw`(?:[eE][-+−]?\d+)?`;
const PLUS_MINUS = String.raw`(?:±|\+\s*/\s*[-−]|\+[-−])`;
const QUANTITY = new RegExp(
  String.raw`^(?<number>${NUMBER})(?:\((?<digits>\d*\.?\d+)\))?(?<exponent>${EXPONENT})\s*(?<unit>[^\d\s±+(),.;][^\s±+(),.;]*|1?/[a-zµμ]+[\^²\d]+)?` +
    String.raw`(?:\s*${PLUS_MINUS}\s*(?<u>${NUMBER}${EXPONENT})\s*(?<uUnit>[^\d\s±][^\s±]*)?)?$`,
);

/**
 * Reads "0.100 um ± 1 %", "295 K ± 2 K", "(0.100 ± 0.001) um" or "0.1000(12) um", with +/- as well as ±.
 *
 * Digits in parentheses are the standard uncertainty of the last digits before them, or the uncertainty itself when
 * they hold a point: JCGM 100:2008 (GUM) 7.2.2, the second and third forms.
 * @returns null when the text is not of this form
 */
export function readQuantity(text: string): WrittenQuantity | null {
  const unbracketed = text.trim().replace(/^\(([^()]*)\)/, "$1");
  const groups = QUANTITY.exec(unbracketed)?.groups;
  if (groups === undefined) return null;
  const number = groups.number!.replace("−", "-");
  const exponent = groups.exponent!.replace("−", "-");
  const value = Number(number + exponent);
  const concise = groups.digits === undefined ? null : conciseUncertainty(number, groups.digits, exponent);
  const stated = groups.u === undefined ? null : Number(groups.u.replace(/−/g, "-"));
  if (!Number.isFinite(value) || (concise !== null && stated !== null)) return null;
  const trailing = groups.uUnit ?? null;
  const shared = groups.unit === undefined && trailing !== null && trailing !== "%";
  return {
    value,
    u: concise ?? stated,
    unit: shared ? trailing : (groups.unit ?? ""),
    uncertaintyUnit: shared ? null : trailing,
  };
}

function conciseUncertainty(number: string, digits: string, exponent: string): number {
  if (digits.includes(".")) return Number(digits + exponent);
  const decimals = number.includes(".") ? number.length - number.indexOf(".") - 1 : 0;
  const power = Number(exponent.slice(1) || 0) - decimals;
  return Number(`${digits}e${power}`);
}

/**
 * A quantity in internal units (µm, ns, K, meV, µm⁻², fraction, number).
 * @throws QuantityFault when it is no quantity, has no unit or one of another kind
 */
export function parseQuantity(text: string, kind: UnitKind): Measured {
  const written = readQuantity(text);
  if (written === null) throw new QuantityFault(notAQuantity(text));
  const unit = plainUnit(written.unit);
  const factor = factorOf(unit, kind);
  const value = kind === "temperature" ? toKelvin(written.value, unit) : written.value * factor;
  const u = uncertainty(written, kind, factor, value);
  if (!(u >= 0 && Number.isFinite(u) && Number.isFinite(value))) {
    throw new QuantityFault("has an uncertainty below zero or too large a number");
  }
  return { value, u };
}

function notAQuantity(text: string): string {
  if (/^\s*[-+]?\d+,\d+/.test(text)) return "has a decimal comma where a point is needed";
  return "is not a number with a unit";
}

function factorOf(unit: string, kind: UnitKind): number {
  const { factors, name } = KINDS[kind];
  const factor = Object.hasOwn(factors, unit) ? factors[unit] : undefined;
  if (factor !== undefined) return factor;
  const known = Object.keys(factors).filter((each) => each !== "");
  if (unit === "") throw new QuantityFault(`has no unit (${known.join(", ")})`);
  if (known.length === 0) throw new QuantityFault(`has the unit ${unit} where a plain number is needed`);
  throw new QuantityFault(`has the unit ${unit}, which is not ${name} (${known.join(", ")})`);
}

function toKelvin(value: number, unit: string): number {
  return unit === "°C" ? value + ZERO_CELSIUS_IN_KELVIN : value;
}

function uncertainty(written: WrittenQuantity, kind: UnitKind, factor: number, value: number): number {
  const { u, uncertaintyUnit } = written;
  if (u === null) return 0;
  if (uncertaintyUnit === null) return u * factor;
  const unit = plainUnit(written.unit);
  if (uncertaintyUnit !== "%" || unit === "%") return u * factorOf(plainUnit(uncertaintyUnit), kind);
  if (unit === "°C") throw new QuantityFault("has an uncertainty in % of a temperature in °C");
  return (u / 100) * Math.abs(value);
}
