import { decode } from "tiff";
import { expect, test } from "vitest";
import { readPlainTiff } from "./plain-reader.ts";
import { type TiffLayout, writeTiff } from "./tiff-file.ts";

// The fuzz compares the program with a second reader; here that reader and its writer are held to the package tiff.
const plain: TiffLayout = {
  littleEndian: true,
  bits: 16,
  format: 1,
  width: 7,
  height: 5,
  rowsPerStrip: 2,
  compression: 1,
};
const frames = [0, 1, 2].map((t) => Array.from({ length: 35 }, (_, i) => 100 * t + 3 * i));
const total = frames.flat().reduce((sum, value) => sum + value, 0);

test.each<[string, Partial<TiffLayout>]>([
  ["little-endian strips", {}],
  ["big-endian bytes", { littleEndian: false }],
  ["one strip a page", { rowsPerStrip: 5 }],
  ["32-bit floating point", { bits: 32, format: 3 }],
  ["deflate", { compression: 8 }],
])("%s: the second reader and the package tiff find what was written", (_, change) => {
  const { bytes } = writeTiff(frames, { ...plain, ...change });
  expect(decode(bytes).map((page) => Array.from(page.data))).toEqual(frames);
  expect(readPlainTiff(bytes)).toEqual({ frames: 3, height: 5, width: 7, sum: total });
});

test("the second reader has no opinion on a file cut in half", () => {
  const { bytes } = writeTiff(frames, plain);
  expect(readPlainTiff(bytes.subarray(0, bytes.length / 2))).toBe(null);
});
