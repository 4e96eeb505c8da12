import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { inflate } from "../../src/stack/file-source.ts";
import type { Decompress } from "../../src/stack/tiff/codecs.ts";
import { openTiff } from "../../src/stack/tiff/read.ts";
import { memorySource } from "../../src/stack/tiff/source.ts";

/** Files written by tifffile and by libtiff (scripts/make-further-tiffs.py), values as NumPy gave them. */
const FURTHER = new URL("../data/tiff-further/", import.meta.url).pathname;

interface Expected {
  readonly shape: readonly [number, number, number];
  readonly absolute_sum: number;
  readonly at_1_17_5: number;
  readonly at_2_22_29: number;
}

const expected: [string, Expected][] = Object.entries(
  JSON.parse(readFileSync(`${FURTHER}expected.json`, "utf8")),
);

async function read(file: string, decoder?: Decompress) {
  const pictures = await openTiff(memorySource(file, readFileSync(FURTHER + file)), decoder);
  const { count, height, width } = pictures;
  const frames = Array.from({ length: count }, (_, index) => {
    const frame = new Float64Array(height * width);
    pictures.read(index, frame);
    return frame;
  });
  return {
    shape: [count, height, width],
    frames,
    at: (k: number, y: number, x: number) => frames[k]![y * width + x],
  };
}

describe("predictors, tiles, strips and sample types that the zoo lacks", () => {
  it.each(expected)("%s, with the platform's inflate and without", async (file, wanted) => {
    for (const decoder of [inflate, undefined]) {
      const { shape, frames, at } = await read(file, decoder);
      expect(shape).toEqual(wanted.shape);
      expect(at(1, 17, 5)).toBe(wanted.at_1_17_5);
      expect(at(2, 22, 29)).toBe(wanted.at_2_22_29);
      const sum = frames.reduce((all, frame) => all + frame.reduce((a, b) => a + Math.abs(b), 0), 0);
      expect(sum / wanted.absolute_sum).toBeCloseTo(1, 12);
    }
  });
});
