import type { Setting } from "../stack/acquisition.ts";
import { InputFault } from "../stack/fault.ts";
import { type Inspection, inspectStack } from "../stack/inspect.ts";
import { type OpenOptions, openRaw, openStack, type RawStack } from "../stack/open.ts";
import { inspectionText } from "./inspection-text.ts";
import { type NoiseLaw, noiseOf } from "./noise.ts";
import { openOptions, type SettingOptions } from "./settings.ts";
import { ExitCode, textWidth } from "./shell.ts";

export interface InspectOptions extends SettingOptions {
  readonly json?: boolean;
}

/** What a recording holds, how its noise looks, and what is said about it: the keys of `inspect --json`. */
export interface FirstLook extends Inspection {
  readonly noise: {
    readonly variance_per_count: number;
    readonly dark_level: number;
    readonly dark_spread: number;
  } | null;
  readonly settings: Readonly<Record<string, Setting>>;
  /** Why `spread` would not run, in its own words; null where it would. */
  readonly missing: string | null;
}

/** `gleamwalk inspect`: what the file holds and what the analysis would still need. */
export async function inspect(file: string, options: InspectOptions): Promise<ExitCode> {
  const how = openOptions(options);
  const raw = await openRaw(file, how);
  const look: FirstLook = {
    ...(await inspectStack(file, how)),
    noise: noiseKeys(noiseOf(raw)),
    ...(await wantedBySpread(raw, how)),
  };
  process.stdout.write(
    options.json === true
      ? `${JSON.stringify(look, null, 2)}\n`
      : inspectionText(look, textWidth(process.stdout)),
  );
  return ExitCode.done;
}

function noiseKeys(noise: NoiseLaw | null): FirstLook["noise"] {
  if (noise === null) return null;
  return { variance_per_count: noise.slope, dark_level: noise.darkLevel, dark_spread: noise.darkSpread };
}

/** Opening it as `spread` does finds the settings after defaults, or the first thing in its way. */
async function wantedBySpread(
  raw: RawStack,
  how: OpenOptions,
): Promise<Pick<FirstLook, "settings" | "missing">> {
  try {
    return { settings: (await openStack(raw.file, how)).acquisition.settings, missing: null };
  } catch (error) {
    if (!(error instanceof InputFault)) throw error;
    return { settings: written(raw), missing: error.message };
  }
}

function written({ settings }: RawStack): Record<string, Setting> {
  return Object.fromEntries(
    [...settings.values].map(([key, { value, from }]) => [
      key,
      { text: typeof value === "object" ? value.join(", ") : String(value), from },
    ]),
  );
}
