import { parse, TomlError } from "smol-toml";
import { InputFault } from "./fault.ts";
import { printable, type SettingText } from "./settings.ts";

/**
 * Flattens the text of an acquisition file to dotted keys; what the keys mean is settled later.
 *
 * @param name how messages call the file
 * @throws InputFault naming file and line when the text is no TOML, or file and key when a value has a form that no
 *   key takes
 */
export function readAcquisitionText(text: string, name: string): Record<string, SettingText> {
  const entries = Object.entries(parseToml(text, name)).flatMap(([key, value]): [string, unknown][] =>
    isTable(value) ? Object.entries(value).map(([inner, each]) => [`${key}.${inner}`, each]) : [[key, value]],
  );
  return Object.fromEntries(entries.map(([key, value]) => [key, plain(value, name, key)]));
}

function parseToml(text: string, name: string): Record<string, unknown> {
  try {
    return parse(text);
  } catch (error) {
    if (!(error instanceof TomlError)) throw error;
    const reason = error.message.split("\n")[0]!.replace(/^Invalid TOML document: /, "");
    throw new InputFault(
      `${name}, line ${error.line}: not valid TOML (${reason}); write key = "value", text and units in quotes`,
      { file: name, where: `line ${error.line}`, cause: error },
    );
  }
}

function isTable(value: unknown): value is Record<string, unknown> {
  return typeof value === "object" && value !== null && !Array.isArray(value) && !(value instanceof Date);
}

function plain(value: unknown, name: string, key: string): SettingText {
  if (typeof value === "string" || typeof value === "number") return value;
  if (typeof value === "boolean" || value instanceof Date) return String(value);
  if (typeof value === "bigint") return Number(value);
  if (Array.isArray(value) && value.every((each) => typeof each === "number" || typeof each === "string")) {
    return value;
  }
  throw new InputFault(`${name}: ${printable(key)} holds a table or a nested list; write one value`, {
    file: name,
    where: key,
  });
}
