import type { Origin } from "./acquisition.ts";
import { ALTERNATIVES, KEY_RULES, SECTIONS } from "./acquisition-keys.ts";
import { InputFault } from "./fault.ts";
import { nearest } from "./nearest.ts";

/** A value as written: text, number, truth value or list. */
export type SettingText = string | number | readonly (string | number)[];

export interface WrittenSetting {
  readonly value: SettingText;
  readonly from: Origin;
}

/** Everything written about a recording, by dotted key, the stronger source having won. */
export interface WrittenSettings {
  /** How messages call the acquisition file: its path, or null where there is none. */
  readonly acquisitionFile: string | null;
  /** The image, for messages about what is written nowhere. */
  readonly image: string;
  readonly values: ReadonlyMap<string, WrittenSetting>;
  /** Why the image's own pixel size is not used. */
  readonly pixelFault: string | null;
}

/** Settings by origin, weakest first. */
export interface SettingSources {
  readonly image: string;
  readonly metadata?: Readonly<Record<string, SettingText>> | undefined;
  readonly pixelFault?: string | null | undefined;
  readonly file?:
    | { readonly name: string; readonly settings: Readonly<Record<string, SettingText>> }
    | undefined;
  readonly overrides?: Readonly<Record<string, string>> | undefined;
}

/**
 * Lays the command line over the acquisition file over the image's metadata.
 *
 * A stronger source that gives delays one way takes away the weaker source's other way.
 * @throws InputFault for a key that does not exist, or two ways at once in one source
 */
export function mergeSettings(sources: SettingSources): WrittenSettings {
  const values = new Map<string, WrittenSetting>();
  const layers: [Origin, string, Readonly<Record<string, SettingText>>][] = [
    ["image metadata", sources.image, sources.metadata ?? {}],
    ["acquisition file", sources.file?.name ?? "", sources.file?.settings ?? {}],
    ["command line", "command line", sources.overrides ?? {}],
  ];
  for (const [from, name, settings] of layers) {
    const keys = Object.keys(settings);
    for (const key of keys) checkKey(name, key);
    refuseBothWays(name, keys);
    for (const key of keys) {
      for (const other of excludedBy(key)) {
        if (!keys.includes(other)) values.delete(other);
      }
    }
    for (const [key, value] of Object.entries(settings)) values.set(key, { value, from });
  }
  return {
    acquisitionFile: sources.file?.name ?? null,
    image: sources.image,
    values,
    pixelFault: sources.pixelFault ?? null,
  };
}

function checkKey(name: string, key: string): void {
  if (Object.hasOwn(KEY_RULES, key) || /^conditions\.[^.]/.test(key)) return;
  if (SECTIONS.includes(key)) {
    throw new InputFault(`${name}: ${key} is a section; write [${key}] with its keys below`, {
      file: name,
      where: key,
    });
  }
  const meant = nearestKey(key);
  throw new InputFault(
    `${name}: ${printable(key)} is not a known key; ${meant === null ? "take it out" : `did you mean ${meant}?`}`,
    { file: name, where: key },
  );
}

/** The last word counts first, so that `pixel` outside its section still finds `space.pixel`. */
function nearestKey(key: string): string | null {
  const known = Object.keys(KEY_RULES);
  const lastWord = (each: string) => each.slice(each.indexOf(".") + 1);
  const sameWord = known.find((each) => lastWord(each) === lastWord(key));
  if (sameWord !== undefined) return sameWord;
  const word = nearest(lastWord(key), known.map(lastWord));
  const [section] = key.split(".");
  const inSection = known.find((each) => each === `${section}.${word}`);
  return inSection ?? nearest(key, known) ?? known.find((each) => lastWord(each) === word) ?? null;
}

function refuseBothWays(name: string, keys: readonly string[]): void {
  for (const [one, other] of ALTERNATIVES) {
    const a = keys.find((key) => one.includes(key));
    const b = keys.find((key) => other.includes(key));
    if (a !== undefined && b !== undefined) {
      throw new InputFault(`${name}: ${a} and ${b} contradict each other; keep one of them`, {
        file: name,
        where: b,
      });
    }
  }
}

function excludedBy(key: string): readonly string[] {
  return ALTERNATIVES.flatMap(([one, other]) => (one.includes(key) ? other : other.includes(key) ? one : []));
}

/** Text within a message of one line: control characters as JSON writes them. */
export function printable(text: string): string {
  return JSON.stringify(text).slice(1, -1);
}
