import { inflateSync } from "node:zlib";

/** What a file holds by a second, independent reading. */
export interface PlainReading {
  readonly frames: number;
  readonly height: number;
  readonly width: number;
  readonly sum: number;
}

const SIZE_OF_TYPE: Readonly<Record<number, number>> = { 1: 1, 3: 2, 4: 4 };

/**
 * Reads plain TIFFs (one sample a pixel, strips, no compression or deflate) by the TIFF 6.0 specification, with
 * nothing of the code under test. It gives null for whatever departs from that: then there is no second opinion.
 */
export function readPlainTiff(bytes: Buffer): PlainReading | null {
  try {
    return read(bytes);
  } catch {
    return null;
  }
}

function read(bytes: Buffer): PlainReading | null {
  const order = bytes.toString("latin1", 0, 2);
  if (order !== "II" && order !== "MM") return null;
  const number = (at: number, size: number) =>
    order === "II" ? bytes.readUIntLE(at, size) : bytes.readUIntBE(at, size);
  if (number(2, 2) !== 42) return null;

  const pages: { height: number; width: number; sum: number }[] = [];
  for (let at = number(4, 4); at !== 0; ) {
    if (pages.length > 1000) return null;
    const entries = number(at, 2);
    const tags = new Map<number, number[]>();
    for (let entry = at + 2; entry < at + 2 + 12 * entries; entry += 12) {
      const size = SIZE_OF_TYPE[number(entry + 2, 2)];
      const count = number(entry + 4, 4);
      if (size === undefined || count > bytes.length) continue;
      const start = size * count <= 4 ? entry + 8 : number(entry + 8, 4);
      tags.set(
        number(entry, 2),
        Array.from({ length: count }, (_, i) => number(start + i * size, size)),
      );
    }
    const page = readPage(bytes, order === "II", tags);
    if (page === null) return null;
    pages.push(page);
    at = number(at + 2 + 12 * entries, 4);
  }
  const [first] = pages;
  if (first === undefined || pages.some((p) => p.height !== first.height || p.width !== first.width))
    return null;
  return { frames: pages.length, ...first, sum: pages.reduce((sum, page) => sum + page.sum, 0) };
}

function readPage(bytes: Buffer, little: boolean, tags: ReadonlyMap<number, number[]>) {
  const one = (tag: number, otherwise?: number) => tags.get(tag)?.[0] ?? otherwise ?? Number.NaN;
  const [width, height, bits, format] = [one(256), one(257), one(258, 1), one(339, 1)];
  const plain =
    one(277, 1) === 1 && one(262, 1) === 1 && one(266, 1) === 1 && one(317, 1) === 1 && !tags.has(322);
  if (!plain || ![8, 16, 32].includes(bits) || !(width > 0 && height > 0)) return null;
  const compression = one(259, 1);
  if (compression !== 1 && compression !== 8) return null;
  // a plain file's strip lengths follow from its size, so a lost table of lengths loses nothing
  const rows = Math.min(one(278, height), height);
  const plainLength = (i: number) => Math.min(rows, height - i * rows) * width * (bits / 8);
  const lengths = tags.get(279) ?? [];
  const strips = tags.get(273)?.map((offset, i) => {
    const length = lengths.length === 0 && compression === 1 ? plainLength(i) : lengths[i];
    if (length === undefined || offset + length > bytes.length) throw new RangeError("cut");
    const raw = bytes.subarray(offset, offset + length);
    return compression === 8 ? inflateSync(raw) : raw;
  });
  if (strips === undefined) return null;

  const [rowBytes, size] = [(width * bits) / 8, bits / 8];
  let sum = 0;
  for (let row = 0; row < height; row++) {
    const strip = strips[Math.floor(row / rows)];
    const start = (row % rows) * rowBytes;
    if (strip === undefined) return null;
    for (let at = start; at < start + rowBytes; at += size) sum += value(strip, at, bits, format, little);
  }
  return { width, height, sum };
}

function value(strip: Buffer, at: number, bits: number, format: number, little: boolean): number {
  const size = bits / 8;
  if (format === 3 && bits === 32) return little ? strip.readFloatLE(at) : strip.readFloatBE(at);
  if (format === 2) return little ? strip.readIntLE(at, size) : strip.readIntBE(at, size);
  if (format === 1) return little ? strip.readUIntLE(at, size) : strip.readUIntBE(at, size);
  throw new RangeError("no such number");
}
