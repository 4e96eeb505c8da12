import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import type { FirstLook } from "../../src/cli/inspect.ts";
import { gleamwalk, PLAIN_TOML, place, scratchFolder, spotStack } from "./command-line.ts";

const folder = scratchFolder();
const read = (args: readonly string[]): FirstLook =>
  JSON.parse(gleamwalk(["inspect", ...args, "--json"]).out);

describe("inspect --json", () => {
  test("gives the stored values before any correction: shape, sum, extremes, pixel, delays", () => {
    const ramp = {
      size: 5,
      frames: 3,
      change: (_: number[], t: number) => Array.from({ length: 25 }, (_, i) => 10 * t + i),
    };
    const file = place(
      folder,
      "ramp",
      spotStack(ramp),
      `${PLAIN_TOML}[detector]\noffset = 2\nread_noise = 1\n`,
    );
    // by hand: 3·(0 + … + 24) + 25·(0 + 10 + 20)
    expect(read([file])).toMatchObject({
      file,
      axes: "TYX",
      shape: [3, 5, 5],
      sample_type: "uint16",
      sum: 1650,
      min: 0,
      max: 44,
      pixel_um: 0.1,
      delays_ns: [0, 0.5, 1],
      missing: null,
    });
  });

  test("says what each frame holds, full pixels included", () => {
    const full = {
      size: 5,
      frames: 3,
      change: (f: number[], t: number) => f.map((_, i) => (i < t ? 900 : 1)),
    };
    const file = place(folder, "full", spotStack(full), `${PLAIN_TOML}[detector]\nsaturation = 900\n`);
    const frames = read([file]).frames.map(({ delay_ns, sum, full }) => [delay_ns, sum, full]);
    expect(frames).toEqual([
      [0, 25, 0],
      [0.5, 924, 1],
      [1, 1823, 2],
    ]);
  });

  test("needs no acquisition file, and says what spread would need", () => {
    const { pixel_um, delays_ns, missing } = read([place(folder, "alone", spotStack(), null)]);
    expect({ pixel_um, delays_ns }).toEqual({ pixel_um: null, delays_ns: null });
    expect(missing).toMatch(/alone\.toml with pixel = /);
  });

  test("names where each setting came from", () => {
    const file = place(folder, "origins", spotStack());
    const { settings } = read([file, "--pixel", "0.2 um"]);
    expect(settings["space.pixel"]).toEqual({ text: "0.2 um", from: "command line" });
    expect(settings["time.step"]).toEqual({ text: "0.5 ns", from: "acquisition file" });
    expect(settings["detector.gain"]?.from).toBe("default");
  });

  test("a single picture is a trace once its axes are stated", () => {
    const file = place(folder, "trace", spotStack({ frames: 1 }), null);
    expect(read([file])).toMatchObject({ axes: "YX", shape: [24, 24] });
    const stated = read([file, "--axes", "TX", "--pixel", "0.1 um", "--step", "1 ns"]);
    expect(stated).toMatchObject({ axes: "TX", shape: [24, 24], missing: null });
    expect(stated.delays_ns).toHaveLength(24);
  });
});

interface Expected {
  readonly readable: boolean;
  readonly shape?: readonly number[];
  readonly sum?: number;
}

// expected.json was written beside the files by the library that made them (tifffile), not by this program
const ZOO = join(import.meta.dirname, "../data/tiff-zoo");
const zoo = Object.entries(
  JSON.parse(readFileSync(join(ZOO, "expected.json"), "utf8")) as Record<string, Expected>,
);

describe("every kind of TIFF reads as it was written, or is refused", () => {
  test.each(zoo)("%s", (name, { readable, shape, sum }) => {
    const { code, out, err } = gleamwalk(["inspect", join(ZOO, name), "--json"]);
    if (readable) expect(JSON.parse(out)).toMatchObject({ shape, sum });
    else expect(err).toMatch(/^gleamwalk: [^\n]+\n$/);
    expect(code).toBe(readable ? 0 : 2);
  });
});

describe("inspect for a person", () => {
  const file = place(folder, "scan", spotStack({ frames: 120 }));

  test("fits a screen of 80 columns", () => {
    const lines = gleamwalk(["inspect", file]).out.split("\n");
    expect(Math.max(...lines.map((line) => [...line].length))).toBeLessThanOrEqual(80);
  });

  test("shows size, pixel, delays, light and noise", () => {
    const { out, code } = gleamwalk(["inspect", file]);
    expect(code).toBe(0);
    expect(out).toContain("120 × 24 × 24 (TYX), uint16");
    expect(out).toContain("pixel 0.1 µm, 120 delays from 0 to 59.5 ns, step 0.5 ns");
    expect(out).toMatch(/█.*▁/);
    // Poisson counts: the variance equals the counts
    expect(Number(/variance ≈ ([\d.]+) ×/.exec(out)?.[1])).toBeCloseTo(1, 0);
  });

  test("refuses what is no image, as spread does", () => {
    const words = join(folder, "words.tif");
    writeFileSync(words, "only words");
    const { code, err } = gleamwalk(["inspect", words]);
    expect({ code, err }).toEqual({
      code: 2,
      err: `gleamwalk: ${words} is not a TIFF image; give a recording saved as TIFF\n`,
    });
  });
});
