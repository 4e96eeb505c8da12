import { deflateSync } from "node:zlib";

/** How one plain TIFF is laid out. */
export interface TiffLayout {
  readonly littleEndian: boolean;
  readonly bits: 8 | 16 | 32;
  /** 1 unsigned, 2 signed, 3 floating point */
  readonly format: 1 | 2 | 3;
  readonly width: number;
  readonly height: number;
  readonly rowsPerStrip: number;
  /** 1 none, 8 deflate */
  readonly compression: 1 | 8;
}

/** A file's bytes, and where its pixels are: everything else is structure. */
export interface TiffFile {
  readonly bytes: Buffer;
  readonly pixelRanges: readonly (readonly [from: number, to: number])[];
}

/**
 * Writes frames as a plain TIFF, by the TIFF 6.0 specification (Adobe, 1992) and by nothing of the code under test:
 * header, then for each page its strips, its directory, its strip tables.
 */
export function writeTiff(frames: readonly ArrayLike<number>[], layout: TiffLayout): TiffFile {
  const bytes = Buffer.alloc(
    8 + frames.length * (1024 + Math.ceil(layout.height * (layout.width * layout.bits * 0.14 + 32))),
  );
  const u16 = (value: number, at: number) =>
    layout.littleEndian ? bytes.writeUInt16LE(value, at) : bytes.writeUInt16BE(value, at);
  const u32 = (value: number, at: number) =>
    layout.littleEndian ? bytes.writeUInt32LE(value, at) : bytes.writeUInt32BE(value, at);
  bytes.write(layout.littleEndian ? "II" : "MM", 0, "latin1");
  u16(42, 2);
  let link = 4;
  let at = 8;
  const pixelRanges: [number, number][] = [];
  for (const frame of frames) {
    const strips = stripsOf(frame, layout).map((strip) => {
      strip.copy(bytes, at);
      const place = { offset: at, length: strip.length };
      pixelRanges.push([at, at + strip.length]);
      at += strip.length + (strip.length % 2);
      return place;
    });
    const table = (values: readonly number[]): [count: number, value: number] => {
      if (values.length === 1) return [1, values[0] ?? 0];
      const start = at;
      for (const value of values) at = u32(value, at);
      return [values.length, start];
    };
    const [offsets, lengths] = [table(strips.map((s) => s.offset)), table(strips.map((s) => s.length))];
    u32(at, link);
    const entries: [tag: number, type: 3 | 4, count: number, value: number][] = [
      [256, 4, 1, layout.width],
      [257, 4, 1, layout.height],
      [258, 3, 1, layout.bits],
      [259, 3, 1, layout.compression],
      [262, 3, 1, 1],
      [273, 4, ...offsets],
      [277, 3, 1, 1],
      [278, 4, 1, layout.rowsPerStrip],
      [279, 4, ...lengths],
      [339, 3, 1, layout.format],
    ];
    at = u16(entries.length, at);
    for (const [tag, type, count, value] of entries) {
      u16(tag, at);
      u16(type, at + 2);
      u32(count, at + 4);
      if (type === 3) u16(value, at + 8);
      else u32(value, at + 8);
      at += 12;
    }
    link = at;
    at += 4;
  }
  return { bytes: bytes.subarray(0, at), pixelRanges };
}

function stripsOf(frame: ArrayLike<number>, layout: TiffLayout): Buffer[] {
  const strips: Buffer[] = [];
  const perStrip = layout.rowsPerStrip * layout.width;
  const size = layout.bits / 8;
  for (let start = 0; start < frame.length; start += perStrip) {
    const values = Array.from(frame).slice(start, start + perStrip);
    const raw = Buffer.alloc(values.length * size);
    for (const [i, value] of values.entries()) put(raw, value, i * size, layout);
    strips.push(layout.compression === 8 ? deflateSync(raw) : raw);
  }
  return strips;
}

function put(into: Buffer, value: number, at: number, { bits, format, littleEndian }: TiffLayout): void {
  if (format === 3) littleEndian ? into.writeFloatLE(value, at) : into.writeFloatBE(value, at);
  else if (format === 2)
    littleEndian ? into.writeIntLE(value, at, bits / 8) : into.writeIntBE(value, at, bits / 8);
  else littleEndian ? into.writeUIntLE(value, at, bits / 8) : into.writeUIntBE(value, at, bits / 8);
}
