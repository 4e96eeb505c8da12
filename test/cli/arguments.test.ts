import { describe, expect, test } from "vitest";
import { seedFrom, timeFrom, windowFrom } from "../../src/cli/arguments.ts";
import { addSetting, overridesFrom } from "../../src/cli/settings.ts";

describe("a delay on the command line", () => {
  test.each([
    ["1 ns", 1],
    ["500 ps", 0.5],
    ["2 us", 2000],
    ["-0.5", -0.5],
    ["1e2", 100],
  ])("%s is %d ns", (text, delay) => {
    expect(timeFrom(text, "--from")).toBeCloseTo(delay, 12);
  });

  test.each(["", "soon", "1 um", "1 ns 2", "nan", "1e999"])(
    "%j is refused with the option's name",
    (text) => {
      expect(() => timeFrom(text, "--from")).toThrow(/^--from .*write a time such as --from "1 ns"$/);
    },
  );

  test("a window needs its first delay before its last", () => {
    expect(windowFrom("1 ns", "2000 ps")).toEqual({ from: 1, to: 2 });
    expect(windowFrom(undefined, "3")).toEqual({ to: 3 });
    expect(() => windowFrom("2 ns", "1 ns")).toThrow("--from 2 ns is not before --to 1 ns");
  });
});

test.each(["-1", "1.5", "x", "9007199254740993"])("the seed %s is refused", (text) => {
  expect(() => seedFrom(text)).toThrow(/^--seed .* is not a whole number/);
});

describe("settings on the command line", () => {
  test("each option stands for its acquisition key", () => {
    expect(overridesFrom({ set: {}, pixel: "0.2 um", temperature: "4 K", axes: "TX" })).toEqual({
      "space.pixel": "0.2 um",
      "sample.temperature": "4 K",
      axes: "TX",
    });
  });

  test("--set reaches any key, an equals sign in the value included", () => {
    const set = addSetting("conditions.bath=a=b", addSetting("detector.offset = 100", {}));
    expect(overridesFrom({ set })).toEqual({ "detector.offset": "100", "conditions.bath": "a=b" });
  });

  test("an option of its own wins over --set", () => {
    expect(overridesFrom({ set: { "time.step": "1 ns" }, step: "2 ns" })).toEqual({ "time.step": "2 ns" });
  });

  test.each(["detector.offset", "=3", ""])("--set %j is refused", (text) => {
    expect(() => addSetting(text, {})).toThrow("KEY=VALUE");
  });
});
