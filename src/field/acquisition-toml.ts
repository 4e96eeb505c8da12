import { stringify } from "smol-toml";
import type { SettingText } from "../stack/settings.ts";

/** The text of an acquisition file from its settings by dotted key. */
export function acquisitionToml(settings: Readonly<Record<string, SettingText>>): string {
  const tables: Record<string, SettingText | Record<string, SettingText>> = {};
  for (const [key, value] of Object.entries(settings)) {
    const dot = key.indexOf(".");
    if (dot < 0) {
      tables[key] = value;
      continue;
    }
    const section = key.slice(0, dot);
    const table = tables[section];
    const inner =
      typeof table === "object" && !Array.isArray(table) ? (table as Record<string, SettingText>) : {};
    inner[key.slice(dot + 1)] = value;
    tables[section] = inner;
  }
  return `${stringify(tables)}\n`;
}
