import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, test } from "vitest";
import { InputFault } from "../../src/stack/fault.ts";
import { inspectStack } from "../../src/stack/inspect.ts";
import { openStack } from "../../src/stack/open.ts";
import { fuzzCase, WHOLE_TIFFS, WHOLE_TOML } from "./cases.ts";
import { misreadTiff, misreadToml } from "./judge.ts";

// The first of the cases that `npm run fuzz` gives to the command line, here to the library.
const CASES = Array.from({ length: 60 }, (_, index) => index);
const folder = mkdtempSync(join(tmpdir(), "gleamwalk-fuzz-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Why the case is not dealt with as it should be; null where it is. */
async function verdict(index: number): Promise<string | null> {
  const one = fuzzCase(index);
  const file = join(folder, `${index}.tif`);
  writeFileSync(file, one.kind === "tiff" ? one.bytes : (WHOLE_TIFFS[0]?.bytes ?? ""));
  writeFileSync(join(folder, `${index}.toml`), one.kind === "toml" ? one.text : WHOLE_TOML);
  try {
    if (one.kind === "tiff") return misreadTiff(one.bytes, one.whole, await inspectStack(file));
    return misreadToml(one.text, (await openStack(file)).acquisition.settings);
  } catch (error) {
    if (!(error instanceof InputFault)) throw error;
    return /^[^\n]+$/.test(error.message) && error.message.includes(`${index}.t`) ? null : error.message;
  }
}

describe("a damaged file is read as what it is, or refused in one sentence that names it", () => {
  test.each(CASES)("case %i", async (index) => {
    expect(await verdict(index)).toBe(null);
  });
});

describe("the judge", () => {
  const [whole] = WHOLE_TIFFS as [(typeof WHOLE_TIFFS)[0]];

  test("calls a wrong sum, a wrong shape and a lost frame misread", async () => {
    const file = join(folder, "whole.tif");
    writeFileSync(file, whole.bytes);
    const { shape, sum } = await inspectStack(file);
    expect(misreadTiff(whole.bytes, whole, { shape, sum })).toBe(null);
    expect(misreadTiff(whole.bytes, whole, { shape, sum: sum + 1 })).toMatch(/is right/);
    expect(misreadTiff(whole.bytes, whole, { shape: [11, 24, 24], sum })).toMatch(/is right/);
  });

  test("calls a setting that was not used, or not as written, misread", () => {
    const settings = { "space.pixel": { text: "0.1 um", from: "acquisition file" } };
    expect(misreadToml('[space]\npixel = "0.1 um"', settings)).toBe(null);
    expect(misreadToml('[space]\npixel = "0.2 um"', settings)).toMatch(/reported as 0.1 um/);
    expect(misreadToml('[time]\ngate = "1 ns"', settings)).toMatch(/not used/);
  });
});
