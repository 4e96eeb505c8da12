import { InvalidArgumentError } from "commander";
import type { OpenOptions } from "../stack/open.ts";

/** What the user may say on the command line about the recording; each overrides the acquisition file. */
export interface SettingOptions {
  readonly acquisition?: string;
  readonly axes?: string;
  readonly pixel?: string;
  readonly first?: string;
  readonly step?: string;
  readonly gate?: string;
  readonly temperature?: string;
  readonly set?: Readonly<Record<string, string>>;
}

const KEY_OF_OPTION = {
  axes: "axes",
  pixel: "space.pixel",
  first: "time.first",
  step: "time.step",
  gate: "time.gate",
  temperature: "sample.temperature",
} as const;

/** Acquisition keys by their dotted names, with the text the user gave. An option of its own wins over --set. */
export function overridesFrom(options: SettingOptions): Record<string, string> {
  const overrides: Record<string, string> = { ...options.set };
  for (const option of Object.keys(KEY_OF_OPTION) as (keyof typeof KEY_OF_OPTION)[]) {
    const text = options[option];
    if (text !== undefined) overrides[KEY_OF_OPTION[option]] = text;
  }
  return overrides;
}

/** How a recording is to be opened. */
export function openOptions(options: SettingOptions): OpenOptions {
  const overrides = overridesFrom(options);
  return options.acquisition === undefined ? { overrides } : { overrides, acquisition: options.acquisition };
}

/** Collects one `--set KEY=VALUE`. */
export function addSetting(
  text: string,
  soFar: Readonly<Record<string, string>> = {},
): Record<string, string> {
  const at = text.indexOf("=");
  const key = text.slice(0, at).trim();
  if (at < 1 || key === "")
    throw new InvalidArgumentError("Write it as KEY=VALUE, such as detector.offset=100.");
  return { ...soFar, [key]: text.slice(at + 1).trim() };
}
