import { describe, expect, test } from "vitest";
import { mergeSettings, type SettingText } from "../../src/stack/settings.ts";
import { numbersOf, quantityOf } from "../../src/stack/values.ts";

const settings = (key: string, value: SettingText) =>
  mergeSettings({ image: "scan.tif", file: { name: "scan.toml", settings: { [key]: value } } });

describe("a number that nobody can mean is refused where it is written, not carried on to overflow", () => {
  test.each<[string, SettingText, RegExp]>([
    ["time.uncertainty", 1e308, /scan\.toml: time\.uncertainty = 1e\+308 is too large to be meant/],
    ["time.uncertainty", "120 %", /is above 100 %/],
    ["space.pixel", "1e300 um", /space\.pixel .* is too large to be meant/],
    ["space.pixel", "1e-300 um", /is too small to be meant/],
    ["detector.gain", 1e-200, /is too small to be meant/],
    ["sample.temperature", "295 K ± 1e200 K", /has an uncertainty larger than itself/],
    ["space.pixel", "0.1 um ± 200 %", /has an uncertainty larger than itself/],
  ])("%s = %s", (key, value, message) => {
    expect(() => quantityOf(settings(key, value), key)).toThrow(message);
  });

  test("a delay of 1e300", () => {
    const written = settings("time.delays", [0, 1, 1e300]);
    expect(() => numbersOf(written, "time.delays")).toThrow(/holds 1e\+300 in place 3, which is too large/);
  });

  test("zero stays zero, and 100 % is allowed", () => {
    expect(quantityOf(settings("time.gate", "0 ns"), "time.gate")).toEqual({ value: 0, u: 0 });
    expect(quantityOf(settings("time.uncertainty", "100 %"), "time.uncertainty")?.value).toBe(1);
  });
});
