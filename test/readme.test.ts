import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { SCENARIO_RULES } from "../src/field/scenario-keys.ts";
import { FLAG } from "../src/report/wording.ts";
import { KEY_RULES } from "../src/stack/acquisition-keys.ts";

const root = join(import.meta.dirname, "..");
const readme = readFileSync(join(root, "README.md"), "utf8");
/** Names in code type in the first column of a table. */
const listed = [...readme.matchAll(/^\| (`[^|]*`[^|]*) \|/gm)].flatMap(([, cell]) =>
  [...(cell ?? "").matchAll(/`([^`]+)`/g)].map(([, name]) => name ?? ""),
);

describe("the README lists", () => {
  test("every key of the acquisition file and of a scenario, and none that does not exist", () => {
    const known = [...Object.keys(KEY_RULES), ...Object.keys(SCENARIO_RULES)];
    const keys = listed.filter(
      (name) => /^[a-z]+\.[a-z0-9_]+$/.test(name) && !/\.(json|csv|html)$/.test(name),
    );
    expect([...keys, "axes"].sort()).toEqual(known.sort());
  });

  test("every code of a verdict, and none that does not exist", () => {
    const source = ["verdict.ts", "field-verdict.ts", "told-apart.ts"]
      .map((file) => readFileSync(join(root, "src/outcome", file), "utf8"))
      .join("\n");
    const codes = new Set([...source.matchAll(/"([a-z]+(?:-[a-z]+)+)",\n/g)].map(([, code]) => code));
    const rows = [...readme.matchAll(/^\| `([a-z-]+)` \| (?:note|caution|unsound)/gm)].map(
      ([, code]) => code,
    );
    expect(rows.sort()).toEqual([...codes].sort());
  });

  test("every flag of a frame", () => {
    for (const flag of Object.keys(FLAG)) expect(readme).toContain(`\`${flag}\``);
  });
});
