import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { InputFault } from "../../src/stack/fault.ts";
import { openRaw } from "../../src/stack/open.ts";

/**
 * Files written by tifffile and libtiff-based tools, with shape, sum and single values as their maker computed them
 * (expected.json): the outside check of the reader.
 */
const ZOO = new URL("../data/tiff-zoo/", import.meta.url).pathname;

interface Expected {
  readonly note: string;
  readonly readable: boolean;
  readonly shape?: readonly number[];
  readonly sum?: number;
  readonly first?: number;
  readonly last?: number;
  readonly at_1_2_3?: number;
}

const expected: Record<string, Expected> = JSON.parse(readFileSync(`${ZOO}expected.json`, "utf8"));
const readable = Object.entries(expected).filter(([, each]) => each.readable);

describe("the files of the zoo", () => {
  it.each(readable)("%s reads to the values its maker wrote", async (file, wanted) => {
    const stack = await openRaw(ZOO + file);
    const frames = Array.from({ length: stack.frames }, (_, index) => {
      const frame = new Float64Array(stack.height * stack.width);
      stack.read(index, frame);
      return frame;
    });
    expect(stack.shape).toEqual(wanted.shape);
    expect(frames.reduce((sum, frame) => sum + frame.reduce((a, b) => a + b, 0), 0)).toBe(wanted.sum);
    expect(frames[0]![0]).toBe(wanted.first);
    expect(frames.at(-1)!.at(-1)).toBe(wanted.last);
    // [1, 2, 3] of a stack; of a single picture, the indices that are left: [2, 3].
    const frame = frames[Math.min(1, frames.length - 1)]!;
    expect(frame[2 * stack.width + 3]).toBe(wanted.at_1_2_3);
  });

  it.each([
    ["rgb.tif", /page 1, is a colour image; save the camera's grey values/],
    ["truncated.tif", /is damaged or was cut: .* lies beyond the end of the file/],
    ["not_a_tiff.tif", /is not a TIFF image; give a recording saved as TIFF/],
    ["empty.tif", /is empty \(0 bytes\)/],
  ])("%s is refused in one sentence that says why", async (file, message) => {
    const fault = await openRaw(ZOO + file).catch((error: unknown) => error);
    expect(fault).toBeInstanceOf(InputFault);
    expect((fault as InputFault).message).toMatch(message);
    expect((fault as InputFault).message).not.toContain("\n");
  });

  it("covers every file that is there", () => {
    const refused = Object.entries(expected).filter(([, each]) => !each.readable);
    expect(readable.length + refused.length).toBe(Object.keys(expected).length);
    expect(refused.map(([file]) => file).sort()).toEqual([
      "empty.tif",
      "not_a_tiff.tif",
      "rgb.tif",
      "truncated.tif",
    ]);
  });
});
