import { deflateSync } from "node:zlib";
import { decode } from "tiff";
import { describe, expect, it } from "vitest";
import { writeTiff } from "../../src/stack/tiff/write.ts";
import { counts, floats } from "./folder.ts";

const maps = [0, 1, 2].map((k) => counts(5, 3, (x, y) => 60_000 + 100 * k + 10 * y + x));
const real = [0, 1].map((k) => floats(5, 3, (x, y) => k - 0.1 * x + 1e6 * y));

/** Read back by the `tiff` package, which shares no code with the writer. */
describe("a written TIFF", () => {
  it("holds 16-bit counts, a page a picture", () => {
    const pages = decode(writeTiff(maps));
    expect(pages.map((page) => page.data)).toEqual(maps.map((map) => map.data));
    expect(pages.map((page) => [page.width, page.height])).toEqual([
      [5, 3],
      [5, 3],
      [5, 3],
    ]);
  });

  it("holds 32-bit floating point", () => {
    expect(decode(writeTiff(real)).map((page) => page.data)).toEqual(real.map((map) => map.data));
  });

  it("packs with the deflate it is given", () => {
    const packed = writeTiff(maps, { deflate: (bytes) => deflateSync(bytes) });
    expect(decode(packed).map((page) => page.data)).toEqual(maps.map((map) => map.data));
  });

  it.each(["a", "abc", "abcd", "<OME/> and more"])(
    "describes itself on the first page as %s",
    (description) => {
      const pages = decode(writeTiff(maps, { description }));
      expect(pages[0]!.imageDescription).toBe(description);
      expect(pages[1]!.imageDescription).toBeUndefined();
      expect(pages[2]!.data).toEqual(maps[2]!.data);
    },
  );

  it("refuses nothing to write and data of another size", () => {
    expect(() => writeTiff([])).toThrow("no picture to write");
    expect(() => writeTiff([{ width: 2, height: 2, data: new Uint16Array(3) }])).toThrow(
      "2 × 2 holds 3 values",
    );
  });
});
