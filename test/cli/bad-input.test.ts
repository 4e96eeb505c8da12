import { mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { writeTiff } from "../fuzzing/tiff-file.ts";
import { gleamwalk, PLAIN_TOML, place, scratchFolder, spotStack } from "./command-line.ts";

const folder = scratchFolder();
const good = spotStack();
const float = { bits: 32, format: 3 } as const;
const plainLayout = { littleEndian: true, bits: 16, format: 1, rowsPerStrip: 24, compression: 1 } as const;

/** Two pages of the same file joined by hand: page 2 is made for its place behind page 1. */
function twoSizes(): Buffer {
  const one = writeTiff([new Array(24 * 24).fill(5)], { ...plainLayout, width: 24, height: 24 }).bytes;
  const other = writeTiff([new Array(24 * 20).fill(5)], { ...plainLayout, width: 24, height: 20 }).bytes;
  const both = Buffer.concat([one, other]);
  const shift = one.length;
  const directory = other.readUInt32LE(4);
  for (let entry = shift + directory + 2; entry < both.length - 4; entry += 12)
    if (both.readUInt16LE(entry) === 273) both.writeUInt32LE(both.readUInt32LE(entry + 8) + shift, entry + 8);
  both.writeUInt32LE(shift + directory, one.length - 4);
  return both;
}

/** The directory of the first page says that its three samples a pixel are red, green and blue. */
function coloured(): Buffer {
  const { bytes } = writeTiff([new Array(24 * 72).fill(5)], { ...plainLayout, width: 72, height: 24 });
  const directory = bytes.readUInt32LE(4);
  const values: Readonly<Record<number, number>> = { 256: 24, 262: 2, 277: 3 };
  for (let entry = directory + 2; entry < bytes.length - 4; entry += 12) {
    const value = values[bytes.readUInt16LE(entry)];
    if (value !== undefined) bytes.writeUInt16LE(value, entry + 8);
  }
  return bytes;
}

const changed = (from: string | RegExp, to: string): string => PLAIN_TOML.replace(from, to);

/** What is wrong, the recording, its acquisition file, and what the one sentence must speak of. */
const WRONG: readonly [what: string, tiff: Buffer | string, toml: string | null, says: readonly RegExp[]][] =
  [
    ["an empty file", "", PLAIN_TOML, [/empty/]],
    ["text under an image name", "these are no pixels, only words", PLAIN_TOML, [/not a TIFF/]],
    ["a cut image", good.subarray(0, good.length / 2), PLAIN_TOML, [/cut/]],
    ["a colour image", coloured(), PLAIN_TOML, [/colour/]],
    ["pages of two sizes", twoSizes(), PLAIN_TOML, [/page 2/, /24 × 20/]],
    ["one frame", spotStack({ frames: 1 }), PLAIN_TOML, [/frame|axes/]],
    [
      "all frames equal",
      spotStack({ change: () => new Array(576).fill(7) }),
      PLAIN_TOML,
      [/same|equal|alike|flat/],
    ],
    ["every pixel zero", spotStack({ change: (f) => f.map(() => 0) }), PLAIN_TOML, [/zero|dark|no light|0/]],
    [
      "a pixel that holds no number",
      spotStack({ layout: float, change: (f, t) => f.map((v, i) => (t === 3 && i === 50 ? Number.NaN : v)) }),
      PLAIN_TOML,
      [/frame 4/, /no number|not a number/],
    ],
    [
      "pixels far below the offset",
      spotStack({ layout: float, change: (f) => f.map((v) => v - 5000) }),
      PLAIN_TOML,
      [/offset/],
    ],
    ["no acquisition file", good, null, [/\.toml/, /pixel/]],
    ["no pixel size", good, changed(/pixel.*/, ""), [/pixel/]],
    ["a unit missing", good, changed("0.100 um ± 1 %", "0.100"), [/space\.pixel/, /unit/]],
    ["a unit of the wrong kind", good, changed("0.100 um ± 1 %", "0.100 ns"), [/space\.pixel/, /ns/]],
    ["no delays", good, changed(/step.*/, ""), [/step|delays/]],
    [
      "too few delays",
      good,
      changed(/first.*\nstep.*/, 'delays = [0, 1, 2]\nunit = "ns"'),
      [/delays/, /3/, /12/],
    ],
    [
      "repeated delays",
      good,
      changed(/first.*\nstep.*/, 'delays = [0, 1, 2, 3, 3, 5, 6, 7, 8, 9, 10, 11]\nunit = "ns"'),
      [/delays/],
    ],
    [
      "delays that do not rise",
      good,
      changed(/first.*\nstep.*/, 'delays = [0, 1, 2, 9, 4, 5, 6, 7, 8, 9, 10, 11]\nunit = "ns"'),
      [/delays/],
    ],
    ["a temperature below 0 K", good, changed("295 K ± 2 K", "-300 °C"), [/sample\.temperature/]],
    [
      "an unknown key",
      good,
      changed("temperature", "temprature"),
      [/sample\.temprature/, /sample\.temperature/],
    ],
    ["a syntax error", good, changed("[time]", "[time"), [/line 3/]],
  ];

describe("wrong input ends with code 2 and one sentence", () => {
  test.each(WRONG)("%s", (what, tiff, toml, says) => {
    const file = place(folder, what.replace(/\W/g, "-"), tiff, toml);
    const ended = gleamwalk(["spread", file]);
    expectRefusal(ended, says);
    expect(ended.err).toMatch(toml === PLAIN_TOML ? /\.tif/ : /\.t(if|oml)/);
  });

  test("a missing file", () => {
    expectRefusal(gleamwalk(["spread", join(folder, "nowhere.tif")]), [
      /nowhere\.tif/,
      /not exist|no file|not found/,
    ]);
  });

  test("a directory in place of a file", () => {
    expectRefusal(gleamwalk(["spread", folder]), [/folder|directory/]);
  });

  test("an acquisition file that is missing", () => {
    const file = place(folder, "lone", good, null);
    expectRefusal(gleamwalk(["spread", file, "-a", join(folder, "nowhere.toml")]), [/nowhere\.toml/]);
  });

  test("an output folder that is a file", () => {
    const file = place(folder, "blocked", good);
    const inTheWay = join(folder, "in-the-way");
    writeFileSync(inTheWay, "mine");
    expectRefusal(gleamwalk(["spread", file, "-o", inTheWay]), [/in-the-way/, /-o/]);
    expectRefusal(gleamwalk(["spread", file, "-o", join(inTheWay, "below")]), [/in-the-way/, /-o/]);
    expect(readFileSync(inTheWay, "utf8")).toBe("mine");
  });

  test("an output folder that cannot be made", () => {
    const file = place(folder, "nowhere-to-go", good);
    expectRefusal(gleamwalk(["spread", file, "-o", "/proc/gleamwalk"]), [/\/proc\/gleamwalk/, /-o/]);
  });

  test.each<[string, readonly string[], readonly RegExp[]]>([
    ["no such command", ["spraed", "x.tif"], [/spraed/, /spread/]],
    ["no command at all", [], [/command/]],
    ["no recording", ["spread"], [/STACK/]],
    [
      "an unknown option, with the nearest one",
      ["spread", "x.tif", "--outptu", "d"],
      [/--outptu/, /--output/],
    ],
    ["two recordings", ["spread", "x.tif", "y.tif"], [/argument/]],
    ["a window upside down", ["spread", "x.tif", "--from", "2 ns", "--to", "1 ns"], [/--from/, /--to/]],
    ["a delay that is no time", ["spread", "x.tif", "--from", "soon"], [/--from "soon"/]],
    ["a seed that is no number", ["spread", "x.tif", "--seed", "lucky"], [/--seed "lucky"/]],
    ["a setting without a value", ["spread", "x.tif", "--set", "space.pixel"], [/--set/, /KEY=VALUE/]],
    ["a synthetic recording without a place", ["synth", "x.toml"], [/--output/]],
  ])("%s", (_, args, says) => {
    expectRefusal(gleamwalk(args), says);
  });

  test("an override with a wrong key or value names the command line", () => {
    const file = place(folder, "override", good);
    expectRefusal(gleamwalk(["spread", file, "--set", "detector.ofset=3"]), [
      /command line/,
      /detector\.offset/,
    ]);
    expectRefusal(gleamwalk(["spread", file, "--pixel", "3"]), [/command line/, /space\.pixel/, /unit/]);
  });
});

test("an older result stays byte for byte when a later run is refused", () => {
  const home = join(folder, "older");
  mkdirSync(home);
  const file = place(home, "scan", good);
  expect(gleamwalk(["spread", file]).code).not.toBe(2);
  const read = () =>
    ["result.json", "frames.csv", "report.html"].map((f) => readFileSync(join(home, "scan.gleamwalk", f)));
  const before = read();
  place(home, "scan", good.subarray(0, 1000));
  expect(gleamwalk(["spread", file]).code).toBe(2);
  expect(read()).toEqual(before);
});

function expectRefusal(ended: ReturnType<typeof gleamwalk>, says: readonly RegExp[]): void {
  expect(ended.err).toMatch(/^gleamwalk: [^\n]+\n$/);
  for (const words of says) expect(ended.err).toMatch(words);
  expect(ended.err.replace("not a number (NaN)", "")).not.toMatch(/\bat .*:\d+:\d+|NaN|undefined/);
  expect({ code: ended.code, out: ended.out }).toEqual({ code: 2, out: "" });
}
