import { deflateSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import { InputFault } from "../../src/stack/fault.ts";
import { inflate } from "../../src/stack/file-source.ts";
import { unpackBits } from "../../src/stack/tiff/packbits.ts";
import { openTiff } from "../../src/stack/tiff/read.ts";
import { memorySource } from "../../src/stack/tiff/source.ts";
import { writeTiff } from "../../src/stack/tiff/write.ts";
import { counts, plainRecording } from "./folder.ts";

/** Where the directory of page `page` (0-based) starts, and the entry of `tag` in it. */
function locate(file: Uint8Array, page: number, tag: number): { directory: number; entry: number } {
  const view = new DataView(file.buffer, file.byteOffset);
  let directory = view.getUint32(4, true);
  for (let k = 0; k < page; k++)
    directory = view.getUint32(directory + 2 + 12 * view.getUint16(directory, true), true);
  const entries = view.getUint16(directory, true);
  const at = Array.from({ length: entries }, (_, i) => directory + 2 + 12 * i);
  return { directory, entry: at.find((each) => view.getUint16(each, true) === tag) ?? at.at(-1)! };
}

/** The recording with one tag of one page set to another value; a tag that is not there takes the last one's place. */
function withTag(
  file: Uint8Array,
  page: number,
  tag: number,
  value: number,
  type = 4,
  count = 1,
): Uint8Array {
  const changed = new Uint8Array(file);
  const view = new DataView(changed.buffer);
  const { entry } = locate(changed, page, tag);
  view.setUint16(entry, tag, true);
  view.setUint16(entry + 2, type, true);
  view.setUint32(entry + 4, count, true);
  view.setUint32(entry + 8, value, true);
  return changed;
}

async function messageOf(bytes: Uint8Array): Promise<string> {
  try {
    const pictures = await openTiff(memorySource("scan.tif", bytes), inflate);
    const frame = new Float64Array(pictures.height * pictures.width);
    for (let index = 0; index < pictures.count; index++) pictures.read(index, frame);
  } catch (error) {
    if (error instanceof InputFault) return error.message;
    throw error;
  }
  return "read";
}

describe("a TIFF that is not what it says, or says what is not read", () => {
  it.each<[string, number, number, RegExp]>([
    ["white as zero", 262, 0, /page 2, stores white as zero/],
    ["a palette", 262, 3, /page 2, is a colour image/],
    ["three samples a pixel", 277, 3, /page 2, is a colour image/],
    ["JPEG", 259, 7, /page 2, is compressed by JPEG, which is not read; save it uncompressed/],
    ["Zstandard", 259, 50000, /is compressed by Zstandard/],
    ["12-bit samples", 258, 12, /stores 12-bit samples of format 1; save it as/],
    ["16-bit floating point", 339, 3, /stores 16-bit samples of format 3/],
    ["complex samples", 339, 6, /stores 16-bit samples of format 6/],
    ["turned pages", 274, 6, /asks to be turned or mirrored/],
    ["pixels beyond the end", 273, 1_000_000, /page 2 needs bytes 1000000 to 1000096 of/],
    ["too few bytes in a strip", 279, 90, /keeps 96 bytes of pixels in 90 bytes/],
    ["samples half as wide as their strips", 258, 8, /keeps 48 bytes of pixels in 96 bytes/],
    ["no height", 257, 0, /has no width or no height/],
    ["a huge width", 256, 4_000_000_000, /claims 4000000000 × 6 pixels; crop it/],
    ["another width", 256, 7, /page 2 has 7 × 6 pixels where page 1 has 8 × 6/],
    ["strips of no rows", 278, 0, /strips or tiles of an impossible size/],
    ["more strips than listed", 278, 1, /lists 1 of the 6 strips or tiles/],
  ])("%s", async (_, tag, value, message) => {
    expect(await messageOf(withTag(plainRecording(), 1, tag, value))).toMatch(message);
  });

  it("a value with more entries than the file has bytes", async () => {
    const bytes = withTag(plainRecording(), 1, 273, 8, 4, 2 ** 31);
    expect(await messageOf(bytes)).toMatch(/tag 273 of page 2 lies beyond the end of the file/);
  });

  it.each([5, 9, 11])("a sample format given as field type %i, which is no unsigned number", async (type) => {
    const message = await messageOf(withTag(plainRecording(), 1, 339, 1, type, 1));
    expect(message).toMatch(/tag 339 of page 2 (holds no whole number|lies beyond the end)/);
  });

  it("two pages with the same pixels", async () => {
    const bytes = plainRecording();
    const offset = new DataView(bytes.buffer).getUint32(locate(bytes, 0, 273).entry + 8, true);
    expect(await messageOf(withTag(bytes, 1, 273, offset + 4))).toMatch(/pages 1 and 2 claim the same bytes/);
  });

  it("directories that run in a circle", async () => {
    const bytes = plainRecording();
    const view = new DataView(bytes.buffer);
    const { directory } = locate(bytes, 3, 0);
    view.setUint32(directory + 2 + 12 * view.getUint16(directory, true), view.getUint32(4, true), true);
    expect(await messageOf(bytes)).toMatch(/directories run in a circle after page 4/);
  });

  it("passes over a page that is marked as a smaller version and is smaller, and reads one that is not", async () => {
    const pictures = [0, 1, 2].map((k) => counts(8, 6, (x, y) => 10 * k + x + 2 * y));
    const preview = counts(4, 3, (x) => x);
    const withPreview = withTag(writeTiff([pictures[0]!, preview, ...pictures.slice(1)]), 1, 254, 1);
    expect((await openTiff(memorySource("scan.tif", withPreview))).count).toBe(3);
    for (const mark of [1, 4]) {
      const onlyMarked = withTag(writeTiff(pictures), 1, 254, mark);
      expect((await openTiff(memorySource("scan.tif", onlyMarked))).count).toBe(3);
    }
  });

  it("every cut of a plain and of a packed recording", async () => {
    const pictures = [0, 1, 2].map((k) => counts(8, 6, (x, y) => 10 * k + x + 2 * y));
    for (const whole of [
      writeTiff(pictures),
      writeTiff(pictures, { deflate: (bytes) => deflateSync(bytes) }),
    ]) {
      expect(await messageOf(whole)).toBe("read");
      for (let length = 0; length < whole.length; length++) {
        expect(await messageOf(whole.slice(0, length)), `cut at ${length}`).not.toBe("read");
      }
    }
  });

  it("packed pixels with a wrong bit, by their checksum", async () => {
    const whole = writeTiff(
      [0, 1, 2].map((k) => counts(8, 6, (x, y) => 10 * k + x + 2 * y)),
      {
        deflate: (bytes) => deflateSync(bytes),
      },
    );
    const strip = new DataView(whole.buffer).getUint32(locate(whole, 0, 273).entry + 8, true);
    whole[strip + 20]! ^= 4;
    expect(await messageOf(whole)).toMatch(/the packed pixels of page 1 do not unpack/);
  });
});

describe("PackBits", () => {
  it("unpacks the example that is commonly given with the format", () => {
    // Apple Technical Note TN1023, "Understanding PackBits": 15 bytes packed, 24 unpacked.
    const packed = "FE AA 02 80 00 2A FD AA 03 80 00 2A 22 F7 AA";
    const unpacked = "AA AA AA 80 00 2A AA AA AA AA 80 00 2A 22 AA AA AA AA AA AA AA AA AA AA";
    const bytes = (text: string) => Uint8Array.from(text.split(" "), (each) => Number.parseInt(each, 16));
    expect(unpackBits(bytes(packed), 24)).toEqual(bytes(unpacked));
  });

  it("passes over the byte that means nothing, and refuses to run off the end", () => {
    expect([...unpackBits(Uint8Array.from([128, 1, 7, 8, 128, 255, 9]), 4)]).toEqual([7, 8, 9, 9]);
    expect(() => unpackBits(Uint8Array.from([3, 1, 2]), 4)).toThrow(RangeError);
    expect(() => unpackBits(Uint8Array.from([255]), 2)).toThrow(RangeError);
    expect(() => unpackBits(Uint8Array.from([128, 128]), 1)).toThrow(RangeError);
  });
});
